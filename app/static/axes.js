// Axes of a small chart: frame, ticks, names; the mapping from values to the picture.

import { svg } from "./dom.js";
import { fixed, plain, ticks } from "./format.js";

export const PAD = { left: 52, right: 12, top: 24, bottom: 36 };

// x, y: {low, high, name, ticks?}. Returns {group, atX, atY, valueX}.
export function axes(width, height, x, y) {
  const [right, bottom] = [width - PAD.right, height - PAD.bottom];
  const atX = (value) => PAD.left + ((value - x.low) / (x.high - x.low || 1)) * (right - PAD.left);
  const atY = (value) => bottom - ((value - y.low) / (y.high - y.low || 1)) * (bottom - PAD.top);
  const group = svg("g", { class: "axes", "aria-hidden": "true" });
  for (const [value, text] of told(x.ticks ?? ticks(x.low, x.high))) {
    group.append(svg("path", { class: "grid", d: `M${atX(value)} ${PAD.top} V${bottom}` }), svg("text", { x: atX(value), y: bottom + 15, "text-anchor": "middle" }, text));
  }
  for (const [value, text] of told(y.ticks ?? ticks(y.low, y.high, 5))) {
    group.append(svg("path", { class: "grid", d: `M${PAD.left} ${atY(value)} H${right}` }), svg("text", { x: PAD.left - 6, y: atY(value) + 4, "text-anchor": "end" }, text));
  }
  group.append(svg("path", { class: "frame", d: `M${PAD.left} ${PAD.top} V${bottom} H${right}` }),
    svg("text", { class: "axis-name", x: (PAD.left + right) / 2, y: height - 4, "text-anchor": "middle" }, x.name),
    svg("text", { class: "axis-name", transform: `translate(11 ${(PAD.top + bottom) / 2}) rotate(-90)`, "text-anchor": "middle" }, y.name));
  const valueX = (px) => x.low + ((px - PAD.left) / (right - PAD.left)) * (x.high - x.low);
  return { group, atX, atY, valueX };
}

// Values with their texts, all to the same place.
function told(values) {
  const places = Math.max(0, ...values.map((value) => (plain(value).split(".")[1] ?? "").length));
  return values.map((value) => [value, fixed(value, places)]);
}

// Low and high with a little room round them; a chart of one value still has a span.
export function roomy(values, share = 0.08) {
  const finite = values.filter(Number.isFinite);
  if (!finite.length) return [0, 1];
  const [low, high] = [Math.min(...finite), Math.max(...finite)];
  const room = (high - low) * share || Math.abs(high) * share || 1;
  return [low - room, high + room];
}
