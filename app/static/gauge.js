// A figure against its limit at a glance: the limit's tick in the middle, the side that meets it
// tinted, the value with its error bar.

import { svg } from "./dom.js";

const WIDTH = 74;
const HEIGHT = 14;

export function gauge({ value, error, limit, sense }) {
  const bar = error > 0 ? error : 0;
  const span = 1.2 * Math.max(Math.abs(value - limit) + bar, 0.25 * Math.abs(limit)) || 1;
  const at = (one) => Math.min(WIDTH - 2, Math.max(2, (WIDTH / 2) * (1 + (one - limit) / span)));
  const middle = HEIGHT / 2;
  const [low, high] = [at(value - bar), at(value + bar)];
  return svg("svg", { class: "gauge", viewBox: `0 0 ${WIDTH} ${HEIGHT}`, width: WIDTH, height: HEIGHT, "aria-hidden": "true" },
    svg("path", { class: "gauge-good", d: sense === "least" ? `M${WIDTH / 2} 1 H${WIDTH} V${HEIGHT - 1} H${WIDTH / 2} Z` : `M0 1 H${WIDTH / 2} V${HEIGHT - 1} H0 Z` }),
    svg("path", { class: "gauge-limit", d: `M${WIDTH / 2} 0 V${HEIGHT}` }),
    bar ? svg("path", { class: "gauge-error", d: `M${low} ${middle} H${high} M${low} ${middle - 3} V${middle + 3} M${high} ${middle - 3} V${middle + 3}` }) : "",
    svg("circle", { class: "gauge-value", cx: at(value), cy: middle, r: 3 }));
}

// Whether the error bar reaches over the limit: then neither outcome is certain.
export function isOpen({ value, error, limit }) {
  return error > 0 && Math.abs(value - limit) < error;
}
