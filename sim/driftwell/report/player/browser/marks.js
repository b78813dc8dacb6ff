// Marks of charges: discs and other shapes with a darker rim, made once for each size.
const FINE = 4;               // places within a pixel that a mark may lie at, along each axis
const SAMPLES = 4;

const INSIDE = {
  disc: (x, y) => x * x + y * y <= 1,
  triangle: (x, y) => y <= 0.72 && y >= -1.1 + 1.75 * Math.abs(x),
  square: (x, y) => Math.abs(x) <= 0.84 && Math.abs(y) <= 0.84,
  diamond: (x, y) => Math.abs(x) + Math.abs(y) <= 1.18,
  star: (x, y) => Math.min(Math.abs(x), Math.abs(y)) <= 0.34 && Math.max(Math.abs(x), Math.abs(y)) <= 1.1,
  ring: (x, y) => { const d = x * x + y * y; return d <= 1 && d >= 0.45; },
  cross: (x, y) => Math.abs(Math.abs(x) - Math.abs(y)) <= 0.42 && Math.max(Math.abs(x), Math.abs(y)) <= 0.95,
};

const MASKS = new Map();

function maskOf(shape, radius, fx, fy) {
  const size = Math.round(radius * 4);
  const key = ((size * FINE + fx) * FINE + fy) * 8 + Object.keys(INSIDE).indexOf(shape);
  const known = MASKS.get(key);
  if (known) return known;
  const r = size / 4, half = Math.ceil(1.2 * r) + 1, side = 2 * half + 1;
  const cover = new Uint16Array(side * side), rim = new Uint16Array(side * side);
  const inside = INSIDE[shape], thin = r > 2.6 ? 1 - 1.0 / r : 2;
  for (let row = 0; row < side; row++) {
    for (let column = 0; column < side; column++) {
      let count = 0, edge = 0;
      for (let s = 0; s < SAMPLES * SAMPLES; s++) {
        const x = column - half - fx / FINE + ((s % SAMPLES) + 0.5) / SAMPLES - 0.5;
        const y = row - half - fy / FINE + (Math.floor(s / SAMPLES) + 0.5) / SAMPLES - 0.5;
        if (!inside(x / r, y / r)) continue;
        count++;
        if (!inside(x / r / thin, y / r / thin)) edge++;
      }
      cover[row * side + column] = count * 256 / (SAMPLES * SAMPLES);
      rim[row * side + column] = thin > 1 || !count ? 0 : edge * 256 / count;
    }
  }
  const made = { half, side, cover, rim };
  MASKS.set(key, made);
  return made;
}

function drawMark(picture, x, y, shape, radius, colour, rimColour, alpha) {
  const { pixels, width, height } = picture;
  const cx = Math.floor(x), cy = Math.floor(y);
  const mask = maskOf(shape, radius, Math.floor((x - cx) * FINE), Math.floor((y - cy) * FINE));
  const { half, side, cover, rim } = mask;
  if (cx < -half || cy < -half || cx > width + half || cy > height + half) return;
  const rb = colour & 0xff00ff, g = colour & 0xff00, rimRB = rimColour & 0xff00ff, rimG = rimColour & 0xff00;
  for (let row = Math.max(0, half - cy); row < side && cy - half + row < height; row++) {
    const line = (cy - half + row) * width + cx - half;
    for (let column = Math.max(0, half - cx); column < side && cx - half + column < width; column++) {
      const m = row * side + column, covered = cover[m];
      if (!covered) continue;
      blend(pixels, line + column, rb, g, (covered * alpha) >> 8);
      if (rim[m]) blend(pixels, line + column, rimRB, rimG, (((covered * rim[m]) >> 8) * alpha) >> 9);
    }
  }
}
