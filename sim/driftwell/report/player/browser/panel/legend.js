// What colours and shapes stand for, beside the picture; names are text, never markup.
const OUTLINES = {
  disc: '<circle cx="8" cy="8" r="5"/>',
  triangle: '<path d="M8 2.5 14 13H2z"/>',
  square: '<path d="M3.5 3.5h9v9h-9z"/>',
  diamond: '<path d="M8 2 14 8 8 14 2 8z"/>',
  star: '<path d="M6.3 2h3.4v4.3H14v3.4H9.7V14H6.3V9.7H2V6.3h4.3z"/>',
  cross: '<path d="M3 5 5 3l3 3 3-3 2 2-3 3 3 3-2 2-3-3-3 3-2-2 3-3z"/>',
  ring: '<circle cx="8" cy="8" r="4" fill="none" stroke="currentColor" stroke-width="2"/>',
};

function element(name, text, kind) {
  const made = document.createElement(name);
  if (text !== undefined) made.textContent = text;
  if (kind) made.className = kind;
  return made;
}

function entry(shape, colour, text) {
  const line = element("div", undefined, "dwp-entry");
  const sign = element("span", undefined, "dwp-sign");
  sign.innerHTML = `<svg viewBox="0 0 16 16" aria-hidden="true" fill="currentColor">${OUTLINES[shape]}</svg>`;
  sign.style.color = cssColour(colour);
  line.append(sign, element("span", text));
  return line;
}

function showLegend(box, mode, data, ways, theme) {
  box.replaceChildren();
  if (mode in data.tones) {
    box.append(toneBar(data.tones[mode], theme));
  } else if (mode === "fate") {
    const found = new Map();
    for (const wall of ways.wall) found.set(wall, (found.get(wall) || 0) + 1);
    for (const [wall, count] of [...found].sort((a, b) => a[0] - b[0])) {
      const [colour, shape] = fateLook(wall);
      const name = wall === -1 ? "stays to the end" : wall < 0 ? "gone, not known where" : `lost: ${data.walls[wall]}`;
      box.append(entry(SHAPES[shape], theme.palette[colour], `${name} (${counted(count)})`));
    }
    if (ways.born.some((t) => t > ways.first)) box.append(entry("ring", theme.pale, "not born yet, where it will be"));
  } else {
    const part = ({ shown, count }) => (shown === count ? counted(count) : `${counted(shown)} of ${counted(count)}`);
    const total = (name, clouds) => clouds.reduce((sum, each) => sum + each[name], 0);
    const said = mode === "species"
      ? ways.kinds.map((kind) => {
        const own = data.clouds.filter((each) => each.species === kind);
        return `${kind}: ${part({ shown: total("shown", own), count: total("count", own) })}`;
      })
      : data.clouds.map((cloud) => `${cloud.name}: ${part(cloud)}, ${cloud.species}`);
    said.forEach((words, number) => {
      const shape = SHAPES[Math.floor(number / theme.palette.length) % SHAPES.length];
      box.append(entry(shape, theme.palette[number % theme.palette.length], words));
    });
  }
  if (ways.lost.some((t) => t <= ways.last)) box.append(entry("cross", mode === "fate" ? theme.ink : theme.pale, "lost there"));
}

function toneBar({ low, high, title, unit: plain }, theme) {
  const whole = element("div", undefined, "dwp-scale");
  whole.append(element("div", title));
  const bar = element("div", undefined, "dwp-tones");
  bar.style.background = `linear-gradient(to right, ${theme.tones.map(cssColour).join(",")})`;
  const { factor, unit } = prefixed(Math.max(Math.abs(low), Math.abs(high)), plain);
  const span = (high - low) / factor || 1;
  const said = (value) => (value / factor).toFixed(Math.min(9, Math.max(0, 2 - Math.floor(Math.log10(span)))));
  const numbersLine = element("div", undefined, "dwp-ends");
  numbersLine.append(element("span", said(low)), element("span", `${said(high)} ${unit}`));
  whole.append(bar, numbersLine);
  return whole;
}
