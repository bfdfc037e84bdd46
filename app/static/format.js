// Numbers as the page writes them.

const MINUS = "\u2212";

// As a design file would state it: no noise of binary fractions.
export function plain(value) {
  return String(Number(Number(value).toPrecision(10)));
}

export function decimalsOf(step) {
  return Math.max(0, Math.ceil(-Math.log10(step) - 1e-9));
}

// A value to the place that its error reaches, with two digits of the error; without one, four digits.
export function figure(value, error = null) {
  if (value === null || value === undefined || !Number.isFinite(value)) return "not given";
  if (error === null || error === undefined || !(error > 0)) return written(value, 4);
  const places = Math.min(6, Math.max(0, 1 - Math.floor(Math.log10(error))));
  return `${fixed(value, places)} \u00b1 ${fixed(error, places)}`;
}

export function written(value, digits = 4) {
  if (value === 0) return "0";
  const places = digits - 1 - Math.floor(Math.log10(Math.abs(value)));
  if (places > 8 || places < -6) return value.toExponential(digits - 1).replaceAll("-", MINUS);
  return fixed(value, Math.min(8, Math.max(0, places)));
}

export function signed(value, digits = 3) {
  return value > 0 ? `+${written(value, digits)}` : written(value, digits);
}

export function fixed(value, places) {
  const text = value.toFixed(places);
  return (Number(text) === 0 ? text.replace("-", "") : text).replace("-", MINUS);
}

export function unitOf(unit) {
  return { deg: "\u00b0" }[unit] ?? unit;
}

// Round numbers between which an axis is divided.
export function ticks(low, high, most = 6) {
  const span = high - low || Math.abs(high) || 1;
  const raw = span / most;
  const power = 10 ** Math.floor(Math.log10(raw));
  const step = [1, 2, 2.5, 5, 10].map((one) => one * power).find((one) => one >= raw * 0.999);
  const found = [];
  for (let k = Math.ceil(low / step - 1e-9); k * step <= high + 1e-9 * span; k += 1) found.push(Number((k * step).toPrecision(12)));
  return found;
}

// Electrical angles are read by parts of a turn.
export function angleTicks(low, high) {
  const step = [5, 10, 15, 30, 60, 90].find((one) => (high - low) / one <= 7) ?? 90;
  const found = [];
  for (let k = Math.ceil(low / step); k * step <= high + 1e-9; k += 1) found.push(k * step);
  return found;
}
