// The value of the field at a cross that keys move, for who has no pointer: shown beside the cross,
// said to a screen reader, and given again as the cross's own name when it gets the focus.

import { el, set } from "./dom.js";
import { written } from "./format.js";

const STEP = 10; // px; with Shift one
const SAY_AFTER_MS = 250; // once the cross rests

export class Probe {
  #cross = el("div", { class: "probe", tabindex: 0, role: "application", "aria-roledescription": "field probe", hidden: true });
  #field;
  #viewport;
  #say;
  #at = null; // mm of the drawing
  #timer = 0;

  constructor(stage, viewport, field, say) {
    this.#field = field;
    this.#viewport = viewport;
    this.#say = say;
    stage.append(this.#cross);
    viewport.on("moved", () => this.#place());
    this.#cross.addEventListener("keydown", (event) => this.#key(event, stage));
    this.#cross.addEventListener("focus", () => this.#show());
    this.#cross.addEventListener("blur", () => field.hint(null));
  }

  // The field's picture is another, or gone.
  changed() {
    this.#cross.hidden = !this.#field.picture;
    if (!this.#field.picture) return;
    this.#at ??= this.#highest;
    this.#place();
    this.#name();
    if (document.activeElement === this.#cross) this.#show();
  }

  focus() {
    if (this.#field.picture) this.#cross.focus();
    else this.#say("no field on the drawing: 2, 3 and 4 choose one");
  }

  get #highest() {
    const { x, y } = this.#field.picture.greatest;
    return { x, y };
  }

  #key(event, stage) {
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    const way = { ArrowLeft: [-1, 0], ArrowRight: [1, 0], ArrowUp: [0, -1], ArrowDown: [0, 1] }[event.key];
    if (way) {
      const step = (event.shiftKey ? 1 : STEP) / this.#viewport.scale;
      this.#at = { x: this.#at.x + way[0] * step, y: this.#at.y + way[1] * step };
    } else if (event.key === "Home") {
      const { width, height } = this.#viewport.size;
      this.#at = this.#viewport.toDrawing(width / 2, height / 2);
    } else if (event.key === "End") {
      this.#at = this.#highest;
    } else if (event.key === "Escape") {
      stage.focus();
    } else {
      return;
    }
    event.preventDefault();
    event.stopPropagation();
    this.#follow();
    if (event.key !== "Escape") this.#show();
  }

  // The view goes with a cross that would leave it.
  #follow() {
    const { x, y } = this.#viewport.toStage(this.#at.x, this.#at.y);
    const { width, height } = this.#viewport.size;
    if (x < 0 || y < 0 || x > width || y > height) this.#viewport.centre(this.#at);
    else this.#place();
  }

  #place() {
    if (!this.#at) return;
    const { x, y } = this.#viewport.toStage(this.#at.x, this.#at.y);
    Object.assign(this.#cross.style, { left: `${x}px`, top: `${y}px` });
    if (document.activeElement === this.#cross) this.#field.hint(this.#at);
  }

  #show() {
    const text = this.#name();
    this.#field.hint(this.#at);
    clearTimeout(this.#timer);
    this.#timer = setTimeout(() => this.#say(text), SAY_AFTER_MS);
  }

  #name() {
    const { unit, name } = this.#field.picture;
    const value = this.#field.valueAt(this.#at);
    const shown = value === null ? "outside the picture" : `${name} ${written(value, 3)} ${unit}`;
    const text = `${shown} at x ${this.#at.x.toFixed(1)}, y ${(-this.#at.y).toFixed(1)} mm`;
    set(this.#cross, { "aria-label": `${text}; arrow keys move it, End goes to the highest value` });
    return text;
  }
}
