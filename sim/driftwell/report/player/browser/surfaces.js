// Surfaces in two layers, made anew when the eye moves: what lies behind the charges is solid,
// what lies before them is a breath of colour and thin edges.
const KIND_NUMBER = { electrode: 1, wall: 2, detector: 3 };
const KIND_NAME = ["", "electrode", "wall", "detector"];
const VEIL = { electrode: 26, wall: 20, detector: 44 };   // alpha of what is seen through, of 255
const LIGHT = [-0.35, 0.6, 0.72];                         // to the right, upwards, towards the eye
const CORNER = [0, 0, 0], CORNERS = [[0, 0, 0, 0], [0, 0, 0, 0], [0, 0, 0, 0]];

function makeSurfaces(data) {
  const spine = data.spine;
  const all = data.surfaces.map((each) => {
    const vertices = numbers(each.vertices), triangles = numbers(each.triangles);
    const count = triangles.length / 3;
    const ahead = new Float64Array(3 * count);            // from the spine to the triangle's middle
    for (let t = 0; t < count; t++) {
      for (let axis = 0; axis < 3; axis++) {
        let middle = 0;
        for (let v = 0; v < 3; v++) middle += vertices[3 * triangles[3 * t + v] + axis] / 3;
        ahead[3 * t + axis] = axis === spine.axis ? 0 : middle - spine.point[axis];
      }
    }
    return {
      name: each.name, kind: each.kind, vertices, triangles, ahead, sharp: each.sharp,
      normals: numbers(each.normals), edges: numbers(each.edges),
      seen: new Float64Array(vertices.length), front: new Uint8Array(count), facing: new Int8Array(count),
    };
  });
  return { all };
}

function drawSurfaces(surfaces, camera, theme, back, front) {
  // back, front : { sheet, pixels, width, height }
  for (const layer of [back, front]) {
    layer.sheet.depth.fill(0);
    layer.sheet.shade.fill(0);
  }
  for (const each of surfaces.all) putFaces(each, camera, back.sheet, front.sheet);
  const paper = word(theme.paper);
  const tables = KIND_NAME.map((kind) => kind && Uint32Array.from(theme.shades[kind], (c) => word(c)));
  const veils = KIND_NAME.map((kind) => kind && Uint32Array.from(theme.shades[kind], (c) => word(c, VEIL[kind])));
  const size = back.pixels.length;
  for (let i = 0; i < size; i++) {
    const shade = back.sheet.shade[i];
    back.pixels[i] = shade ? tables[back.sheet.kind[i]][shade - 1] : paper;
  }
  front.pixels.fill(0);
  for (let i = 0; i < size; i++) {
    const shade = front.sheet.shade[i];
    if (shade) front.pixels[i] = veils[front.sheet.kind[i]][shade - 1];
  }
  for (const each of surfaces.all) putEdges(each, camera, theme, back, front);
}

function putFaces(each, camera, back, frontSheet) {
  const { vertices, triangles, normals, ahead, seen, kind } = each;
  const v = vertices.length / 3, s = camera.stretch;
  for (let i = 0; i < v; i++) {
    camera.project(vertices[3 * i], vertices[3 * i + 1], vertices[3 * i + 2], seen, 3 * i);
  }
  const to = camera.toward, [rx, ry, rz] = camera.right, [ux, uy, uz] = camera.up;
  const lx = LIGHT[0] * rx + LIGHT[1] * ux + LIGHT[2] * to[0];
  const ly = LIGHT[0] * ry + LIGHT[1] * uy + LIGHT[2] * to[1];
  const lz = LIGHT[0] * rz + LIGHT[1] * uz + LIGHT[2] * to[2];
  const [ex, ey, ez] = [0, 1, 2].map((axis) => camera.target[axis] * s[axis] + camera.distance * to[axis]);
  const number = KIND_NUMBER[kind];
  for (let t = 0; t < triangles.length / 3; t++) {
    const side = ahead[3 * t] * s[0] * to[0] + ahead[3 * t + 1] * s[1] * to[1] + ahead[3 * t + 2] * s[2] * to[2];
    const front = side > 0 || kind === "detector";
    each.front[t] = front ? 1 : 0;
    let toward = 0, clear = 0;
    for (let k = 0; k < 3; k++) {
      const i = triangles[3 * t + k], o = 9 * t + 3 * k, corner = CORNERS[k];
      const nx = normals[o] / s[0], ny = normals[o + 1] / s[1], nz = normals[o + 2] / s[2];
      const view = nx * (ex - vertices[3 * i] * s[0]) + ny * (ey - vertices[3 * i + 1] * s[1])
        + nz * (ez - vertices[3 * i + 2] * s[2]);
      toward += view;
      const lit = (nx * lx + ny * ly + nz * lz) / (Math.sqrt(nx * nx + ny * ny + nz * nz) || 1);
      const bright = 0.4 + 0.6 * (view < 0 ? -lit : lit);
      corner[0] = seen[3 * i];
      corner[1] = seen[3 * i + 1];
      corner[2] = 1 / seen[3 * i + 2];
      corner[3] = 1 + (SHADES - 1) * (bright < 0 ? 0 : bright > 1 ? 1 : bright);
      if (seen[3 * i + 2] >= camera.near) clear++;
    }
    each.facing[t] = toward > 0 ? 1 : -1;
    const sheet = front ? frontSheet : back;
    if (clear === 3) fillTriangle(sheet, CORNERS[0], CORNERS[1], CORNERS[2], number);
    else if (clear > 0) putCut(t, each, camera, sheet);
  }
}

// a triangle of which a part lies behind the eye: that is cut off
function putCut(t, each, camera, sheet) {
  const { seen, vertices, triangles } = each, kept = [];
  for (let k = 0; k < 3; k++) {
    const i = triangles[3 * t + k], j = triangles[3 * t + (k + 1) % 3];
    const di = seen[3 * i + 2], dj = seen[3 * j + 2];
    const si = CORNERS[k][3], sj = CORNERS[(k + 1) % 3][3];
    if (di >= camera.near) kept.push([seen[3 * i], seen[3 * i + 1], 1 / di, si]);
    if ((di >= camera.near) !== (dj >= camera.near)) {
      const w = (camera.near * 1.0001 - di) / (dj - di);
      const mix = (axis) => vertices[3 * i + axis] + w * (vertices[3 * j + axis] - vertices[3 * i + axis]);
      if (camera.project(mix(0), mix(1), mix(2), CORNER, 0)) {
        kept.push([CORNER[0], CORNER[1], 1 / CORNER[2], si + w * (sj - si)]);
      }
    }
  }
  for (let k = 2; k < kept.length; k++) {
    fillTriangle(sheet, kept[0], kept[k - 1], kept[k], KIND_NUMBER[each.kind]);
  }
}

function putEdges(each, camera, theme, back, front) {
  const { edges, seen, sharp, facing } = each;
  const colour = word(each.kind === "detector" ? theme.accent : theme.edge);
  for (let e = 0; e < edges.length / 4; e++) {
    const i = edges[4 * e], j = edges[4 * e + 1], one = edges[4 * e + 2], other = edges[4 * e + 3];
    if (e >= sharp && facing[one] === facing[other]) continue;
    if (seen[3 * i + 2] < camera.near || seen[3 * j + 2] < camera.near) continue;
    const isFront = each.front[one] && each.front[other];
    const layer = isFront ? front : back;
    // an edge lies on its surface: a little nearer, so that this does not hide it
    const closer = 1.004;
    const draw = isFront ? drawVeiled : drawLine;
    draw(layer, seen[3 * i], seen[3 * i + 1], seen[3 * j], seen[3 * j + 1], colour, isFront ? 120 : 170,
      isFront ? 120 : 170, layer.sheet.depth, closer / seen[3 * i + 2], closer / seen[3 * j + 2]);
  }
}

// the same as drawLine on a layer that is mostly empty: the pixel takes the line's colour
function drawVeiled(picture, x0, y0, x1, y1, colour, a0, a1, depth, i0, i1) {
  const { pixels, width, height } = picture;
  SEGMENT[0] = x0; SEGMENT[1] = y0; SEGMENT[2] = x1; SEGMENT[3] = y1;
  if (!clipped(SEGMENT, width, height)) return;
  const dx = x1 - x0, dy = y1 - y0, whole = dx * dx + dy * dy || 1;
  const along = (x, y) => ((x - x0) * dx + (y - y0) * dy) / whole;
  const first = along(SEGMENT[0], SEGMENT[1]), last = along(SEGMENT[2], SEGMENT[3]);
  const steep = Math.abs(dy) > Math.abs(dx);
  const steps = Math.max(1, Math.ceil(Math.abs(steep ? SEGMENT[3] - SEGMENT[1] : SEGMENT[2] - SEGMENT[0])));
  for (let s = 0; s <= steps; s++) {
    const w = s / steps, x = SEGMENT[0] + w * (SEGMENT[2] - SEGMENT[0]), y = SEGMENT[1] + w * (SEGMENT[3] - SEGMENT[1]);
    const fx = Math.floor(steep ? x : x + 0.5), fy = Math.floor(steep ? y + 0.5 : y);
    const part = steep ? x - fx : y - fy, i = fy * width + fx;
    if (i0 + (first + w * (last - first)) * (i1 - i0) < depth[i]) continue;
    veil(pixels, i, colour, a0 * (1 - part));
    veil(pixels, i + (steep ? 1 : width), colour, a0 * part);
  }
}

function veil(pixels, i, colour, alpha) {
  if (alpha > pixels[i] >>> 24) pixels[i] = ((alpha << 24) | (colour & 0xffffff)) >>> 0;
}
