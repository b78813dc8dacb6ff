// Colours: the page's own for light and dark, and those of charges and surfaces beside them.
const PALETTES = {
  light: ["#0072b2", "#d55e00", "#009e73", "#b8568f", "#b97f00", "#3a93c9", "#222222"],
  dark: ["#4aa8e8", "#f08a45", "#2fc79a", "#e29cc0", "#f0b83a", "#94d4fa", "#e8e8e8"],
};
const SHAPES = ["disc", "triangle", "square", "diamond", "star"];
const SHADES = 64;

function parsed(colour) {
  // [r, g, b] of any CSS colour
  const probe = parsed.probe || (parsed.probe = document.createElement("canvas").getContext("2d"));
  probe.fillStyle = "#000";
  probe.fillStyle = colour;
  const text = probe.fillStyle;
  if (text[0] === "#") return [1, 3, 5].map((i) => parseInt(text.slice(i, i + 2), 16));
  return text.match(/[\d.]+/g).slice(0, 3).map(Number);
}

function word([r, g, b], alpha = 255) {
  // a pixel as the canvas keeps it on little-endian machines
  return ((alpha << 24) | (Math.round(b) << 16) | (Math.round(g) << 8) | Math.round(r)) >>> 0;
}

function mixed(one, other, part) {
  return one.map((x, i) => x + (other[i] - x) * part);
}

function makeTheme(root) {
  const theme = {};
  theme.read = () => {
    const style = getComputedStyle(root);
    const own = (name, fallback) => style.getPropertyValue(name).trim() || fallback;
    const paper = parsed(own("--dwp-ground", own("--paper", "#ffffff")));
    const dark = paper[0] + paper[1] + paper[2] < 384;
    theme.dark = dark;
    theme.paper = paper;
    theme.ink = parsed(own("--ink", dark ? "#e6e6e6" : "#222222"));
    theme.pale = parsed(own("--pale", dark ? "#a0a0a0" : "#666666"));
    theme.accent = parsed(own("--accent", dark ? "#7fc0ea" : "#0b5c8a"));
    theme.palette = PALETTES[dark ? "dark" : "light"].map(parsed);
    theme.tones = TONES[dark ? "dark" : "light"].map(parsed);
    // from turned away to full in the light
    const tables = dark
      ? { electrode: ["#2a2926", "#8d8679"], wall: ["#20272e", "#66788a"], detector: ["#1b3a4a", "#5fb3d9"] }
      : { electrode: ["#a79f90", "#f1ece1"], wall: ["#93a3b3", "#e6eef5"], detector: ["#6fb3d6", "#d8eef9"] };
    theme.shades = {};
    for (const [kind, [from, to]] of Object.entries(tables)) {
      const a = parsed(from), b = parsed(to);
      theme.shades[kind] = Array.from({ length: SHADES }, (_, i) => mixed(a, b, i / (SHADES - 1)));
    }
    theme.edge = mixed(theme.paper, theme.ink, dark ? 0.62 : 0.6);
  };
  theme.read();
  return theme;
}

function cssColour(rgb) {
  return `rgb(${rgb.map(Math.round).join(",")})`;
}
