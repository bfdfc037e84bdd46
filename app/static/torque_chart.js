// Torque over the rotor's electrical angle, with its mean, and the kept design's beside it.

import { axes, PAD, roomy } from "./axes.js";
import { set, svg } from "./dom.js";
import { angleTicks, written } from "./format.js";

const HEIGHT = 200;

export class TorqueChart {
  #host;
  #torque = null;
  #kept = null;

  constructor(host) {
    this.#host = host;
    new ResizeObserver(() => this.#draw()).observe(host);
  }

  // Only drawn where it is another one: to ask for the host's width lays the whole page out.
  show(torque, kept) {
    const [own, other] = [torque, kept].map((one) => (one?.torque_nm?.length ? one : null));
    if (own === this.#torque && other === this.#kept) return;
    this.#torque = own;
    this.#kept = other;
    this.#draw();
  }

  #draw() {
    const width = this.#host.clientWidth;
    if (!this.#torque || width < 120) {
      this.#host.replaceChildren();
      return;
    }
    const { angle_deg: angles, torque_nm: torques } = this.#torque;
    const [low, high] = roomy([...torques, ...(this.#kept?.torque_nm ?? [])], 0.12);
    const [from, to] = [angles[0], angles.at(-1)];
    const frame = axes(width, HEIGHT, { low: from, high: to, name: "electrical angle in \u00b0", ticks: angleTicks(from, to) }, { low, high, name: "torque in N m" });
    const line = ({ angle_deg: x, torque_nm: y }) => x.map((value, k) => `${k ? "L" : "M"}${frame.atX(value).toFixed(1)} ${frame.atY(y[k]).toFixed(1)}`).join("");
    const mean = torques.reduce((sum, value) => sum + value, 0) / torques.length;
    const told = `torque: mean ${written(mean, 3)} N m, ${written(Math.min(...torques), 3)} to ${written(Math.max(...torques), 3)} N m`;
    const readout = svg("text", { class: "chart-value", x: width - PAD.right, y: 13, "text-anchor": "end" }, told);
    const cross = svg("path", { class: "cross" });
    const picture = svg("svg", { class: "chart", viewBox: `0 0 ${width} ${HEIGHT}`, width, height: HEIGHT, role: "img", "aria-label": told },
      frame.group,
      svg("path", { class: "mean", d: `M${frame.atX(from)} ${frame.atY(mean)} H${frame.atX(to)}` }),
      this.#kept && svg("path", { class: "curve kept-line", d: line(this.#kept) }),
      svg("path", { class: "curve", d: line(this.#torque) }), cross, readout);
    picture.addEventListener("pointermove", (event) => {
      const at = frame.valueX(event.clientX - picture.getBoundingClientRect().left);
      const k = nearest(angles, at);
      set(cross, { d: `M${frame.atX(angles[k])} ${PAD.top} V${HEIGHT - PAD.bottom}` });
      readout.textContent = `${written(torques[k], 4)} N m at ${written(angles[k], 3)}\u00b0`;
    });
    picture.addEventListener("pointerleave", () => {
      set(cross, { d: null });
      readout.textContent = told;
    });
    this.#host.replaceChildren(picture);
  }
}

function nearest(values, at) {
  let best = 0;
  values.forEach((value, k) => {
    if (Math.abs(value - at) < Math.abs(values[best] - at)) best = k;
  });
  return best;
}
