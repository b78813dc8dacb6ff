// Triangles into a buffer of shades with a buffer of depths: the nearest is seen.
function makeSheet(width, height) {
  return {
    width, height,
    depth: new Float32Array(width * height),   // one over the distance; 0 where nothing is
    shade: new Uint8Array(width * height),     // 1 to SHADES; 0 where nothing is
    kind: new Uint8Array(width * height),
  };
}

// corners as x, y, 1/depth, shade
function fillTriangle(sheet, a, b, c, kind) {
  const { width, height, depth, shade } = sheet;
  const area = (b[0] - a[0]) * (c[1] - a[1]) - (c[0] - a[0]) * (b[1] - a[1]);
  if (!(Math.abs(area) > 1e-6)) return;
  const top = Math.max(0, Math.ceil(Math.min(a[1], b[1], c[1]) - 0.5));
  const bottom = Math.min(height - 1, Math.floor(Math.max(a[1], b[1], c[1]) - 0.5));
  const turn = 1 / area;
  const slope = (u, v, w) => ((v - u) * (c[1] - a[1]) - (w - u) * (b[1] - a[1])) * turn;
  const fall = (u, v, w) => ((w - u) * (b[0] - a[0]) - (v - u) * (c[0] - a[0])) * turn;
  const zx = slope(a[2], b[2], c[2]), zy = fall(a[2], b[2], c[2]);
  const sx = slope(a[3], b[3], c[3]), sy = fall(a[3], b[3], c[3]);
  for (let row = top; row <= bottom; row++) {
    const y = row + 0.5;
    let left = Infinity, right = -Infinity;
    for (let e = 0; e < 3; e++) {
      const p = e === 0 ? a : e === 1 ? b : c, q = e === 0 ? b : e === 1 ? c : a;
      if ((p[1] <= y) === (q[1] <= y)) continue;
      const x = p[0] + (q[0] - p[0]) * (y - p[1]) / (q[1] - p[1]);
      if (x < left) left = x;
      if (x > right) right = x;
    }
    const first = Math.max(0, Math.ceil(left - 0.5)), last = Math.min(width - 1, Math.ceil(right - 0.5) - 1);
    let z = a[2] + zx * (first + 0.5 - a[0]) + zy * (y - a[1]);
    let s = a[3] + sx * (first + 0.5 - a[0]) + sy * (y - a[1]);
    for (let i = row * width + first, stop = row * width + last; i <= stop; i++, z += zx, s += sx) {
      if (z > depth[i]) {
        depth[i] = z;
        shade[i] = s < 1 ? 1 : s > SHADES ? SHADES : s;
        sheet.kind[i] = kind;
      }
    }
  }
}
