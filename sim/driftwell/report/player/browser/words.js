// Numbers with units in words: "12.3 µs", "4.05 keV", "2 000".
const PREFIXES = ["f", "p", "n", "µ", "m", "", "k", "M", "G", "T"];

function prefixed(size, unit) {
  // the prefix in which a value of this size is read, and what a value is divided by
  if (!(Math.abs(size) > 0) || !isFinite(size)) return { factor: 1, unit };
  const power = Math.floor(Math.log10(Math.abs(size)) / 3 + 1e-9);
  const step = Math.min(Math.max(power, -5), 4);
  return { factor: 10 ** (3 * step), unit: PREFIXES[step + 5] + unit };
}

function plain(value, digits = 3) {
  if (!isFinite(value)) return "–";
  const text = Number(value.toPrecision(digits));
  return String(text).replace("-", "−").replace("e+", "e");
}

function spelled(value, unit, digits = 3) {
  const { factor, unit: said } = prefixed(value, unit);
  return plain(value / factor, digits) + " " + said;
}

function counted(value) {
  return String(Math.round(value)).replace(/\B(?=(\d{3})+$)/g, "\u202f");
}

function niceStep(span, parts) {
  // a round step of which `span` holds about so many
  const raw = span / Math.max(parts, 1);
  const power = 10 ** Math.floor(Math.log10(raw));
  const part = raw / power;
  return (part < 1.5 ? 1 : part < 3.5 ? 2 : part < 7.5 ? 5 : 10) * power;
}
