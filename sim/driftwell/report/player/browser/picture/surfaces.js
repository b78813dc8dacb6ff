// Surfaces in two layers, made anew when the eye moves: what lies behind the charges is solid,
// what lies before them is a breath of colour and thin edges. Between both is a plane through the
// spine of the scene, across the line of sight; faces and edges are cut there.
const KIND_NUMBER = { electrode: 1, wall: 2, detector: 3 };
const KIND_NAME = ["", "electrode", "wall", "detector"];
const VEIL = { electrode: 26, wall: 36, detector: 40 };   // alpha of what is seen through, of 255
const LIGHT = [-0.35, 0.6, 0.72];                         // to the right, upwards, towards the eye
const CORNERS = [[0, 0, 0, 0], [0, 0, 0, 0], [0, 0, 0, 0]];
const CLOSER = 1.012;         // an edge lies on its surface: so much nearer, that this does not hide it

function makeSurfaces(data) {
  const all = data.surfaces.map((each) => {
    const vertices = numbers(each.vertices), triangles = numbers(each.triangles);
    return {
      name: each.name, kind: each.kind, vertices, triangles, sharp: each.sharp,
      normals: numbers(each.normals), edges: numbers(each.edges),
      seen: new Float64Array(vertices.length), side: new Float64Array(vertices.length / 3),
      facing: new Int8Array(triangles.length / 3),
    };
  });
  return { all, spine: data.spine };
}

function drawSurfaces(surfaces, camera, theme, back, front) {
  // back, front : { sheet, pixels, width, height }
  for (const layer of [back, front]) {
    layer.sheet.depth.fill(0);
    layer.sheet.shade.fill(0);
  }
  const cuts = [];
  for (const each of surfaces.all) {
    place(each, surfaces.spine, camera);
    putFaces(each, camera, back.sheet, front.sheet, cuts);
  }
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
  for (const [a, b] of cuts) putLine(a, b, camera, back, drawLine, word(theme.edge), 170);
  for (const each of surfaces.all) putEdges(each, camera, theme, back, front);
}

// corners in the picture, and how far each lies on the viewer's side of the spine
function place(each, spine, camera) {
  const { vertices, seen, side, kind } = each, { stretch: s, toward: to } = camera;
  for (let v = 0, i = 0; v < side.length; v++, i += 3) {
    camera.project(vertices[i], vertices[i + 1], vertices[i + 2], seen, i);
    let sum = 0;
    for (let axis = 0; axis < 3; axis++) {
      if (axis !== spine.axis) sum += (vertices[i + axis] - spine.point[axis]) * s[axis] * to[axis];
    }
    side[v] = kind === "detector" ? 1 : sum;
  }
}

function putFaces(each, camera, back, front, cuts) {
  const { vertices, triangles, normals, seen, side, kind } = each;
  const s = camera.stretch, number = KIND_NUMBER[kind];
  const to = camera.toward, [rx, ry, rz] = camera.right, [ux, uy, uz] = camera.up;
  const lx = LIGHT[0] * rx + LIGHT[1] * ux + LIGHT[2] * to[0];
  const ly = LIGHT[0] * ry + LIGHT[1] * uy + LIGHT[2] * to[1];
  const lz = LIGHT[0] * rz + LIGHT[1] * uz + LIGHT[2] * to[2];
  const [ex, ey, ez] = [0, 1, 2].map((axis) => camera.target[axis] * s[axis] + camera.distance * to[axis]);
  for (let t = 0; t < triangles.length / 3; t++) {
    let toward = 0, clear = 0, ahead = 0;
    for (let k = 0; k < 3; k++) {
      const v = triangles[3 * t + k], i = 3 * v, o = 9 * t + 3 * k, corner = CORNERS[k];
      const nx = normals[o] / s[0], ny = normals[o + 1] / s[1], nz = normals[o + 2] / s[2];
      const view = nx * (ex - vertices[i] * s[0]) + ny * (ey - vertices[i + 1] * s[1])
        + nz * (ez - vertices[i + 2] * s[2]);
      toward += view;
      const lit = (nx * lx + ny * ly + nz * lz) / (Math.sqrt(nx * nx + ny * ny + nz * nz) || 1);
      const bright = 0.4 + 0.6 * (view < 0 ? -lit : lit);
      corner[0] = seen[i];
      corner[1] = seen[i + 1];
      corner[2] = 1 / seen[i + 2];
      corner[3] = 1 + (SHADES - 1) * (bright < 0 ? 0 : bright > 1 ? 1 : bright);
      if (seen[i + 2] >= camera.near) clear++;
      if (side[v] > 0) ahead++;
    }
    each.facing[t] = toward > 0 ? 1 : -1;
    if (clear === 0) continue;
    const whole = ahead === 0 || ahead === 3;
    if (whole && clear === 3) {
      fillTriangle(ahead ? front : back, CORNERS[0], CORNERS[1], CORNERS[2], number);
      continue;
    }
    const corners = [0, 1, 2].map((k) => {
      const v = triangles[3 * t + k];
      return [vertices[3 * v], vertices[3 * v + 1], vertices[3 * v + 2], CORNERS[k][3], side[v]];
    });
    if (whole) {
      putPolygon(corners, camera, ahead ? front : back, number);
    } else {
      const behind = kept(corners, (p) => -p[4]);
      putPolygon(behind, camera, back, number);
      putPolygon(kept(corners, (p) => p[4]), camera, front, number);
      const on = behind.filter((p) => p.cut);
      if (on.length === 2) cuts.push(on);
    }
  }
}

// the part of a polygon where a linear function of its points is not negative
function kept(points, level) {
  const found = [];
  points.forEach((p, k) => {
    const q = points[(k + 1) % points.length], a = level(p), b = level(q);
    if (a >= 0) found.push(p);
    if ((a >= 0) !== (b >= 0)) {
      const made = p.map((x, i) => x + a / (a - b) * (q[i] - x));
      made.cut = true;
      found.push(made);
    }
  });
  return found;
}

function depthOf(camera, p) {
  const m = camera.m;
  return camera.distance - (m[8] * p[0] + m[9] * p[1] + m[10] * p[2] + m[11]);
}

// points x, y, z, shade; what lies behind the eye is cut off
function putPolygon(points, camera, sheet, number) {
  const before = kept(points, (p) => depthOf(camera, p) - 1.0001 * camera.near);
  const corners = before.map((p) => {
    const at = [0, 0, 0, p[3]];
    camera.project(p[0], p[1], p[2], at, 0);
    at[2] = 1 / at[2];
    return at;
  });
  for (let k = 2; k < corners.length; k++) fillTriangle(sheet, corners[0], corners[k - 1], corners[k], number);
}

// a line in space from a to b into one layer
function putLine(a, b, camera, layer, draw, colour, alpha) {
  const level = (p) => depthOf(camera, p) - 1.0001 * camera.near;
  const la = level(a), lb = level(b);
  if (la < 0 && lb < 0) return;
  const cut = (p, q, lp, lq) => [0, 1, 2].map((i) => p[i] + lp / (lp - lq) * (q[i] - p[i]));
  const from = la < 0 ? cut(a, b, la, lb) : a, to = lb < 0 ? cut(b, a, lb, la) : b;
  const one = [0, 0, 0], other = [0, 0, 0];
  if (!camera.project(from[0], from[1], from[2], one, 0) || !camera.project(to[0], to[1], to[2], other, 0)) return;
  draw(layer, one[0], one[1], other[0], other[1], colour, alpha, alpha, layer.sheet.depth, CLOSER / one[2], CLOSER / other[2]);
}

function putEdges(each, camera, theme, back, front) {
  const { edges, vertices, sharp, facing, side } = each;
  const colour = word(each.kind === "detector" ? theme.accent : theme.edge);
  const corner = (v) => [vertices[3 * v], vertices[3 * v + 1], vertices[3 * v + 2]];
  for (let e = 0; e < edges.length / 4; e++) {
    const v = edges[4 * e], w = edges[4 * e + 1];
    if (e >= sharp && facing[edges[4 * e + 2]] === facing[edges[4 * e + 3]]) continue;
    const a = corner(v), b = corner(w), sa = side[v], sb = side[w];
    const parts = sa > 0 === sb > 0 ? [[a, b, sa > 0]] : (() => {
      const middle = a.map((x, i) => x + sa / (sa - sb) * (b[i] - x));
      return [[a, middle, sa > 0], [middle, b, sb > 0]];
    })();
    for (const [from, to, ahead] of parts) {
      putLine(from, to, camera, ahead ? front : back, ahead ? drawVeiled : drawLine, colour, ahead ? 120 : 170);
    }
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
