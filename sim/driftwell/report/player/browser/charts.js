// Charts in time beside the player: a cursor at its time; a click, a drag or a key goes there.
const SVG = "http://www.w3.org/2000/svg";
const TALL = 150, LEFT = 58, RIGHT = 12, TOP = 24, BOTTOM = 24;

function svg(name, attributes, parent) {
  const made = document.createElementNS(SVG, name);
  for (const [key, value] of Object.entries(attributes)) made.setAttribute(key, value);
  if (parent) parent.append(made);
  return made;
}

function chartList(data, theme) {
  const { groups } = data.curves, found = [];
  const time = numbers(data.curves.time), every = data.curves.every;
  const note = every > 1 ? `, every ${every}th record` : "";
  const name = (group) => group.name || "all";
  const colour = (g) => (groups.length > 1 && g === 0 ? theme.ink : theme.palette[(groups.length > 1 ? g - 1 : g) % theme.palette.length]);
  const curves = groups.map((group) => ({
    name: name(group), alive: numbers(group.alive), size: group.size.map(numbers), energy: numbers(group.energy),
  }));
  if (time.length > 1 && curves.length) {
    found.push({
      title: `charges there${note}`, unit: "", time, zero: true, stairs: true,
      lines: curves.map((each, g) => ({ name: each.name, values: each.alive, colour: colour(g), dash: DASHES[g % DASHES.length] })),
    });
    const whole = curves[0];
    found.push({
      title: `rms size${curves.length > 1 ? ", all charges" : ""}${note}`, unit: "m", time, zero: true,
      lines: whole.size.map((values, axis) => ({ name: "xyz"[axis], values, colour: theme.palette[axis], dash: DASHES[axis] })),
    });
    found.push({
      title: `mean kinetic energy${note}`, unit: "eV", time, zero: false,
      lines: curves.map((each, g) => ({ name: each.name, values: each.energy, colour: colour(g), dash: DASHES[g % DASHES.length] })),
    });
  }
  const when = numbers(data.curves.ledger.time), residual = numbers(data.curves.ledger.residual);
  if (when.length > 1 && residual.some((x) => x > 0)) {
    found.push({
      title: "closing error of the energy, relative", unit: "", time: when, log: true,
      lines: [{ name: "energy", values: residual, colour: theme.ink, dash: "" }],
    });
  }
  return found;
}
const DASHES = ["", "6 3", "2 2", "8 3 2 3"];

function makeCharts(box, data, theme, clock) {
  const charts = [];
  const shown = (t) => charts.forEach((chart) => chart.point(t));
  function build() {
    box.replaceChildren();
    charts.length = 0;
    for (const each of chartList(data, theme)) charts.push(makeChart(box, each, clock, theme));
    shown(clock.time);
  }
  build();
  let width = box.clientWidth;
  new ResizeObserver(() => {
    if (Math.abs(box.clientWidth - width) < 2) return;
    width = box.clientWidth;
    build();
  }).observe(box);
  document.addEventListener("driftwell:time", (event) => shown(event.detail.time));
  return { build };
}

function makeChart(box, chart, clock, theme) {
  const figure = element("figure", undefined, "dwp-chart");
  box.append(figure);
  const wide = Math.max(240, figure.clientWidth || 420);
  const { first, last } = clock;
  const drawing = svg("svg", {
    viewBox: `0 0 ${wide} ${TALL}`, role: "slider", tabindex: "0", "aria-label": `${chart.title}; time`,
    "aria-valuemin": first, "aria-valuemax": last,
  }, figure);
  const scale = prefixed(last || 1, "s");
  const x = (t) => LEFT + (t - first) / (last - first || 1) * (wide - LEFT - RIGHT);
  const up = upwards(chart);
  const title = svg("text", { x: 4, y: 14, class: "dwp-title" }, drawing);
  title.textContent = chart.title + (up.unit ? ` (${up.unit})` : "");
  up.ticks.forEach((value) => {
    const y = up.place(value);
    svg("line", { x1: LEFT, x2: wide - RIGHT, y1: y, y2: y, class: "dwp-grid" }, drawing);
    svg("text", { x: LEFT - 6, y: y + 4, "text-anchor": "end" }, drawing).textContent = up.said(value);
  });
  const step = niceStep((last - first) / scale.factor, wide / 90);
  for (let t = Math.ceil(first / scale.factor / step - 1e-9) * step; t <= last / scale.factor * (1 + 1e-9); t += step) {
    const at = x(t * scale.factor), final = at > wide - 40;
    svg("text", { x: at, y: TALL - 7, "text-anchor": final ? "end" : "middle" }, drawing).textContent =
      plain(Math.abs(t) < 1e-9 * step ? 0 : t, 6) + (final ? ` ${scale.unit}` : "");
  }
  for (const line of chart.lines) {
    svg("path", { d: pathOf(chart, line, x, up), class: "dwp-line", stroke: cssColour(line.colour), "stroke-dasharray": line.dash }, drawing);
  }
  if (chart.lines.length > 1) figure.append(keyOf(chart, theme));
  const cursor = svg("line", { y1: TOP - 4, y2: TALL - BOTTOM, class: "dwp-cursor" }, drawing);
  listen(drawing, wide, first, last);

  const at = (t) => {
    let low = 0, high = chart.time.length - 1;
    while (low < high) { const m = (low + high + 1) >> 1; if (chart.time[m] <= t) low = m; else high = m - 1; }
    return low;
  };
  return {
    point(t) {
      cursor.setAttribute("x1", x(t));
      cursor.setAttribute("x2", x(t));
      drawing.setAttribute("aria-valuenow", t);
      if (clock.playing) return;
      const i = at(t);
      drawing.setAttribute("aria-valuetext", `${spelled(t, "s", 4)}: ` + chart.lines.map(
        ({ name, values }) => `${name} ${chart.unit ? spelled(values[i], chart.unit) : plain(values[i])}`).join(", "));
    },
  };
}

function upwards(chart) {
  let low = Infinity, high = -Infinity;
  for (const { values } of chart.lines) {
    for (const value of values) {
      if (!isFinite(value) || (chart.log && value <= 0)) continue;
      if (value < low) low = value;
      if (value > high) high = value;
    }
  }
  if (low > high) { low = 0; high = 1; }
  const tall = TALL - TOP - BOTTOM, foot = TALL - BOTTOM;
  if (chart.log) {
    const a = Math.floor(Math.log10(low)), b = Math.max(Math.ceil(Math.log10(high)), a + 1);
    const every = Math.ceil((b - a) / 4), ticks = [];
    for (let power = a; power <= b; power += every) ticks.push(10 ** power);
    const place = (value) => foot - (Math.log10(Math.max(value, 10 ** a)) - a) / (b - a) * tall;
    return { ticks, place, unit: "", said: (value) => `1e${Math.round(Math.log10(value))}`.replace("-", "−") };
  }
  if (chart.zero) low = Math.min(0, low);
  if (!(high > low)) { high = low + Math.abs(low || 1); }
  const { factor, unit } = chart.unit ? prefixed(Math.max(Math.abs(low), Math.abs(high)), chart.unit) : { factor: 1, unit: "" };
  const step = niceStep((high - low) / factor, 4);
  const from = Math.floor(low / factor / step + 1e-9) * step, to = Math.ceil(high / factor / step - 1e-9) * step;
  const ticks = [];
  for (let i = 0; from + i * step <= to + 0.01 * step; i++) ticks.push(from + i * step);
  const digits = Math.max(4, Math.ceil(Math.log10(Math.abs(to) / step + 1)) + 1);
  return {
    ticks, unit, place: (value) => foot - (value - from) / (to - from) * tall,
    said: (value) => plain(Math.abs(value) < 1e-9 * step ? 0 : value, Math.min(digits, 12)), factor,
  };
}

function pathOf(chart, line, x, up) {
  const factor = up.factor || 1, parts = [];
  let before = null;
  for (let i = 0; i < chart.time.length; i++) {
    const value = line.values[i];
    if (!isFinite(value) || (chart.log && value <= 0)) { before = null; continue; }
    const px = x(chart.time[i]).toFixed(1), py = up.place(value / factor).toFixed(1);
    parts.push(before === null ? `M${px} ${py}` : chart.stairs ? `H${px}V${py}` : `L${px} ${py}`);
    before = py;
  }
  return parts.join("");
}

function keyOf(chart) {
  const key = element("figcaption", undefined, "dwp-key");
  for (const { name, colour, dash } of chart.lines) {
    const item = element("span", undefined, "dwp-entry");
    const sign = svg("svg", { viewBox: "0 0 22 8", width: 22, height: 8, "aria-hidden": "true" });
    svg("line", { x1: 0, x2: 22, y1: 4, y2: 4, stroke: cssColour(colour), "stroke-width": 2, "stroke-dasharray": dash }, sign);
    item.append(sign, element("span", name));
    key.append(item);
  }
  return key;
}

function listen(drawing, wide, first, last) {
  const seek = (event) => {
    const box = drawing.getBoundingClientRect();
    const at = (event.clientX - box.left) / box.width * wide;
    const time = first + (at - LEFT) / (wide - LEFT - RIGHT) * (last - first);
    document.dispatchEvent(new CustomEvent("driftwell:seek", { detail: { time } }));
  };
  drawing.addEventListener("pointerdown", (event) => {
    drawing.setPointerCapture(event.pointerId);
    seek(event);
  });
  drawing.addEventListener("pointermove", (event) => {
    if (drawing.hasPointerCapture(event.pointerId)) seek(event);
  });
}
