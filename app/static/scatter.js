// Designs of a study by two figures: the front joined by a line, those that miss a limit hollow.
// One point at a time can be reached by Tab; arrow keys go along the front.

import { axes, roomy } from "./axes.js";
import { set, svg } from "./dom.js";
import { written } from "./format.js";

const HEIGHT = 260;

// Rows that no other that meets all limits is better than in both: sense "most" wants more.
export function front(rows, x, y) {
  const score = (row) => [x, y].map(({ key, sense }) => (sense === "least" ? -1 : 1) * row.figures[key]);
  const able = rows.filter((row) => row.passes && score(row).every(Number.isFinite)).sort((a, b) => score(b)[0] - score(a)[0] || score(b)[1] - score(a)[1]);
  const found = [];
  let best = -Infinity;
  for (const row of able) {
    if (score(row)[1] > best) {
      best = score(row)[1];
      found.push(row);
    }
  }
  return found;
}

export class Scatter {
  #host;
  #pick;
  #chosen = null;
  #shown = null;

  // `pick(row)`: a point was chosen.
  constructor(host, pick) {
    this.#host = host;
    this.#pick = pick;
    new ResizeObserver(() => this.#shown && this.show(...this.#shown)).observe(host);
  }

  get isShown() {
    return this.#host.querySelector("svg") !== null && this.#host.clientWidth > 0;
  }

  // x, y: {key, label, unit, sense}.
  show(rows, x, y, chosen) {
    this.#shown = [rows, x, y, chosen];
    this.#chosen = chosen;
    const width = this.#host.clientWidth;
    const drawn = rows.filter((row) => [x, y].every(({ key }) => Number.isFinite(row.figures?.[key])));
    if (!drawn.length || width < 120) {
      this.#host.replaceChildren();
      return;
    }
    const [xs, ys] = [x, y].map(({ key }) => roomy(drawn.map((row) => row.figures[key])));
    const named = ({ label, unit }) => (unit ? `${label} in ${unit}` : label);
    const frame = axes(width, HEIGHT, { low: xs[0], high: xs[1], name: named(x) }, { low: ys[0], high: ys[1], name: named(y) });
    const at = (row) => [frame.atX(row.figures[x.key]), frame.atY(row.figures[y.key])];
    const best = front(drawn, x, y);
    const isBest = new Set(best.map((row) => row.number));
    const focusable = best.length ? best : drawn;
    const points = drawn.map((row) => {
      const [cx, cy] = at(row);
      const kind = isBest.has(row.number) ? "best" : row.passes ? "able" : "missing";
      return svg("circle", { class: `point ${kind}${row.number === chosen ? " is-chosen" : ""}`, cx, cy, r: isBest.has(row.number) ? 5 : 3.5, "data-row": row.number });
    });
    const line = best.map((row, k) => `${k ? "L" : "M"}${at(row).map((one) => one.toFixed(1)).join(" ")}`).join("");
    const told = `${drawn.length} designs by ${named(x)} and ${named(y)}; ${best.length} on the front`;
    const picture = svg("svg", { class: "chart scatter", viewBox: `0 0 ${width} ${HEIGHT}`, width, height: HEIGHT, role: "listbox", "aria-label": told, tabindex: 0 },
      frame.group, svg("path", { class: "front", d: line }), ...points);
    const rowOf = new Map(drawn.map((row) => [row.number, row]));
    for (const point of points) {
      const row = rowOf.get(Number(point.dataset.row));
      set(point, { role: "option", id: `point-${row.number}`, "aria-selected": String(row.number === chosen),
        "aria-label": `design ${row.number}: ${x.label} ${written(row.figures[x.key], 4)}, ${y.label} ${written(row.figures[y.key], 4)}${row.passes ? "" : ", misses a limit"}` });
    }
    set(picture, { "aria-activedescendant": rowOf.has(chosen) ? `point-${chosen}` : null });
    picture.addEventListener("click", (event) => {
      const box = picture.getBoundingClientRect();
      const near = nearest(drawn, at, event.clientX - box.left, event.clientY - box.top);
      if (near) this.#pick(near);
    });
    picture.addEventListener("keydown", (event) => {
      const step = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1 }[event.key];
      if (!step) return;
      event.preventDefault();
      const order = [...focusable].sort((a, b) => a.figures[x.key] - b.figures[x.key]);
      const now = order.findIndex((row) => row.number === this.#chosen);
      this.#pick(order[Math.min(order.length - 1, Math.max(0, now + step))]);
      this.#host.querySelector("svg").focus();
    });
    const hadFocus = this.#host.contains(document.activeElement);
    this.#host.replaceChildren(picture);
    if (hadFocus) picture.focus();
  }
}

function nearest(rows, at, px, py) {
  let [best, least] = [null, 22];
  for (const row of rows) {
    const [x, y] = at(row);
    const gap = Math.hypot(x - px, y - py);
    if (gap < least) [best, least] = [row, gap];
  }
  return best;
}
