// Written over the picture: length bars, the three axes, names of surfaces.
const FONT = "system-ui, -apple-system, 'Segoe UI', Roboto, 'Noto Sans', sans-serif";

function drawOverlay(context, camera, theme, ratio, names) {
  context.save();
  context.scale(ratio, ratio);
  const width = camera.width / ratio, height = camera.height / ratio;
  context.font = `13px ${FONT}`;
  context.textBaseline = "middle";
  context.lineJoin = "round";
  if (names) drawNames(context, camera, theme, ratio, names);
  drawAxes(context, camera, theme, height);
  drawBars(context, camera, theme, ratio, width, height);
  context.restore();
}

function haloed(context, theme, text, x, y, colour) {
  context.lineWidth = 3.5;
  context.strokeStyle = cssColour(theme.paper);
  context.strokeText(text, x, y);
  context.fillStyle = cssColour(colour);
  context.fillText(text, x, y);
}

function drawAxes(context, camera, theme, height) {
  const at = [46, height - 46], long = 30;
  const arms = ["x", "y", "z"].map((name, axis) => ({
    name, dx: camera.right[axis] * long, dy: -camera.up[axis] * long, ahead: camera.toward[axis],
  })).sort((a, b) => a.ahead - b.ahead);
  for (const { name, dx, dy, ahead } of arms) {
    context.strokeStyle = cssColour(ahead < -0.2 ? theme.pale : theme.ink);
    context.lineWidth = 1.6;
    context.beginPath();
    context.moveTo(...at);
    context.lineTo(at[0] + dx, at[1] + dy);
    context.stroke();
    const far = Math.hypot(dx, dy);
    if (far < 9) continue;
    context.textAlign = "center";
    haloed(context, theme, name, at[0] + dx * (1 + 11 / far), at[1] + dy * (1 + 11 / far), theme.ink);
  }
}

function lengthBars(camera, ratio) {
  // lengths along axes of one scale each, true at the target's distance
  const alike = camera.stretch[0] === camera.stretch[1] && camera.stretch[1] === camera.stretch[2];
  const groups = alike ? [[0, ""]] : axesByStretch(camera.stretch);
  return groups.map(([axis, name]) => {
    const pixel = camera.distance / camera.focal / camera.stretch[axis] * ratio;
    const length = niceStep(90 * pixel, 1);
    return { long: length / pixel, text: spelled(length, "m") + (name && ` along ${name}`) };
  });
}

function axesByStretch(stretch) {
  const found = new Map();
  stretch.forEach((value, axis) => {
    const known = found.get(value);
    if (known) known[1] += ", " + "xyz"[axis]; else found.set(value, [axis, "xyz"[axis]]);
  });
  return [...found.values()];
}

function drawBars(context, camera, theme, ratio, width, height) {
  context.textAlign = "left";
  lengthBars(camera, ratio).reverse().forEach(({ long, text }, row) => {
    const left = 104, y = height - 26 - 24 * row;
    context.strokeStyle = cssColour(theme.ink);
    context.lineWidth = 2;
    context.beginPath();
    context.moveTo(left, y - 4); context.lineTo(left, y + 4);
    context.moveTo(left, y); context.lineTo(left + long, y);
    context.moveTo(left + long, y - 4); context.lineTo(left + long, y + 4);
    context.stroke();
    haloed(context, theme, text, left + long + 10, y, theme.ink);
  });
}

function drawNames(context, camera, theme, ratio, surfaces) {
  const taken = [], done = new Set();
  context.font = `12px ${FONT}`;
  context.textAlign = "center";
  const width = camera.width / ratio, height = camera.height / ratio;
  for (const { name, seen, kind } of surfaces.all) {
    if (done.has(name) || taken.length > 12) continue;
    const shown = name.length > 28 ? name.slice(0, 27) + "…" : name;
    const half = 0.5 * context.measureText(shown).width + 4;
    let best = null;
    for (let i = 0; i < seen.length; i += 3) {
      if (seen[i + 2] < camera.near) continue;
      const x = seen[i] / ratio, y = seen[i + 1] / ratio - 10;
      if (x < half + 4 || x > width - half - 4 || y < 12 || y > height - 70) continue;
      if (taken.some((box) => Math.abs(box[0] - x) < box[2] + half && Math.abs(box[1] - y) < 17)) continue;
      if (!best || y < best[1]) best = [x, y];
    }
    if (!best) continue;
    done.add(name);
    taken.push([...best, half]);
    haloed(context, theme, shown, ...best, kind === "detector" ? theme.accent : theme.pale);
  }
  context.font = `13px ${FONT}`;
}
