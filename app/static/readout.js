// The chosen mark in figures: its key, a field for its value, and how far it may go and why.

import { byId, el, set, setText } from "./dom.js";
import { plain, unitOf, written } from "./format.js";

export class Readout {
  #host = byId("readout");
  #title = el("span", { class: "readout-title" });
  #input = el("input", { type: "number", id: "readout-value", class: "readout-value", step: "any" });
  #unit = el("span", { class: "unit" });
  #track = el("span", { class: "track", "aria-hidden": "true" }, el("span", { class: "track-at" }));
  #least = el("span", { class: "bound" });
  #most = el("span", { class: "bound" });
  #why = el("p", { class: "why" });
  #handle = null;

  // `accept(handle, value)`: a value was typed.
  constructor(accept) {
    const typed = () => {
      const value = this.#input.valueAsNumber;
      if (this.#handle && Number.isFinite(value) && value !== this.#handle.value) accept(this.#handle, value);
    };
    this.#input.addEventListener("change", typed);
  }

  // No mark is chosen; of a rotor that is a drawing there is none.
  rest(hasMarks) {
    this.#handle = null;
    this.#host.replaceChildren(el("p", { class: "hint" }, hasMarks
      ? "Take hold of a mark on the drawing, or press D and use the arrow keys."
      : "This rotor is a drawing itself: no key of the design file moves its barriers, so it has no marks."));
  }

  focus() {
    if (!this.#handle) return;
    this.#input.focus();
    this.#input.select();
  }

  // `canHave`: limits come; none are told of an outline that cannot be built.
  show(handle, value, limits, canHave = true) {
    if (!handle) return;
    if (!this.#handle) {
      this.#host.replaceChildren(
        el("label", { for: "readout-value", class: "readout-name" }, this.#title),
        el("span", { class: "readout-entry" }, this.#input, this.#unit),
        el("span", { class: "readout-range" }, this.#least, this.#track, this.#most), this.#why);
    }
    this.#handle = handle;
    setText(this.#title, `barrier ${handle.barrier} \u00b7 ${handle.kind}`);
    set(this.#title, { title: handle.key });
    const text = plain(value);
    if (this.#input.value !== text) this.#input.value = text;
    setText(this.#unit, unitOf(handle.unit));
    this.#range(value, limits, canHave);
  }

  #range(value, limits, canHave) {
    this.#track.hidden = !limits;
    setText(this.#least, limits ? written(limits.least.value, 4) : canHave ? "limits \u2026" : "no limits of an outline that cannot be built");
    setText(this.#most, limits ? written(limits.most.value, 4) : "");
    set(this.#input, { min: limits?.least.value ?? null, max: limits?.most.value ?? null });
    if (!limits) {
      setText(this.#why, "");
      return;
    }
    const { least, most } = limits;
    const share = (value - least.value) / (most.value - least.value || 1);
    this.#track.firstChild.style.left = `${100 * Math.min(1, Math.max(0, share))}%`;
    const isLow = share < 0.5;
    const near = isLow ? least : most;
    const isAt = share < 0.01 || share > 0.99;
    set(this.#why, { "data-at": String(isAt) });
    setText(this.#why, `${isAt ? "limit: " : isLow ? "at the least: " : "at the most: "}${near.why.replace(`${this.#handle.key}: `, "")}`);
  }
}
