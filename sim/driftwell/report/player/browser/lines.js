// Lines into a buffer of pixels, smooth at their edges (X. Wu, 1991, from memory), opaque below.
function blend(pixels, i, rb, g, alpha) {
  // alpha of 0 to 256; red and blue are mixed in one go
  const there = pixels[i], dRB = there & 0xff00ff, dG = there & 0xff00;
  const mixRB = (dRB + (Math.imul(rb - dRB, alpha) >>> 8)) & 0xff00ff;
  const mixG = (dG + (Math.imul(g - dG, alpha) >>> 8)) & 0xff00;
  pixels[i] = (0xff000000 | mixRB | mixG) >>> 0;
}

function clipped(line, width, height) {
  // a line [x0, y0, x1, y1] cut to the picture with a border of one pixel; false if nothing is left
  const dx = line[2] - line[0], dy = line[3] - line[1];
  let from = 0, to = 1;
  const sides = [[-dx, line[0] - 1], [dx, width - 2 - line[0]], [-dy, line[1] - 1], [dy, height - 2 - line[1]]];
  for (const [p, q] of sides) {
    if (p === 0) { if (q < 0) return false; continue; }
    const part = q / p;
    if (p < 0) { if (part > to) return false; if (part > from) from = part; }
    else { if (part < from) return false; if (part < to) to = part; }
  }
  const [x, y] = line;
  line[0] = x + from * dx; line[1] = y + from * dy;
  line[2] = x + to * dx; line[3] = y + to * dy;
  return true;
}

const SEGMENT = [0, 0, 0, 0];

// from alpha a0 to a1 (0 to 256); with `depth` only where 1/depth exceeds what is there
function drawLine(picture, x0, y0, x1, y1, colour, a0, a1, depth, i0, i1) {
  const { pixels, width, height } = picture;
  if (x0 < 1 || x1 < 1 || y0 < 1 || y1 < 1 || x0 > width - 2 || x1 > width - 2 || y0 > height - 2 || y1 > height - 2) {
    SEGMENT[0] = x0; SEGMENT[1] = y0; SEGMENT[2] = x1; SEGMENT[3] = y1;
    if (!clipped(SEGMENT, width, height)) return;
    if (depth) {
      const whole = Math.hypot(x1 - x0, y1 - y0) || 1;
      const first = Math.hypot(SEGMENT[0] - x0, SEGMENT[1] - y0) / whole;
      const last = Math.hypot(SEGMENT[2] - x0, SEGMENT[3] - y0) / whole;
      const change = i1 - i0;
      i1 = i0 + change * last; i0 += change * first;
    }
    [x0, y0, x1, y1] = SEGMENT;
  }
  const rb = colour & 0xff00ff, g = colour & 0xff00;
  const dx = x1 - x0, dy = y1 - y0;
  const steep = Math.abs(dy) > Math.abs(dx);
  const steps = Math.max(1, Math.ceil(Math.abs(steep ? dy : dx)));
  const sx = dx / steps, sy = dy / steps, sa = (a1 - a0) / steps, si = (i1 - i0) / steps;
  let x = x0, y = y0, a = a0, inverse = i0;
  const across = steep ? 1 : width;
  for (let s = 0; s <= steps; s++, x += sx, y += sy, a += sa, inverse += si) {
    let i, part;
    if (steep) {
      const fx = Math.floor(x); part = x - fx; i = Math.floor(y + 0.5) * width + fx;
    } else {
      const fy = Math.floor(y); part = y - fy; i = fy * width + Math.floor(x + 0.5);
    }
    if (depth && inverse < depth[i]) continue;
    blend(pixels, i, rb, g, (a * (1 - part)) | 0);
    blend(pixels, i + across, rb, g, (a * part) | 0);
  }
}
