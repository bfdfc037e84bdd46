// What part of the drawing is seen: mm of the middle and pixels per mm; zoom and pan by wheel,
// pointer, two fingers and keys. The SVG and the field's canvas below it follow the same numbers.

import { Teller } from "./dom.js";

const NEAREST = 400; // px per mm: a rib of 0.3 mm fills 120 px
const PAN_STEP = 0.08; // of the view's width

export class Viewport extends Teller {
  middle = { x: 0, y: 0 };
  scale = 1; // CSS pixels per mm
  size = { width: 1, height: 1 };
  #stage;
  #box = null; // x, y, width, height in mm of all there is
  #near = null; // the same without the most of the shaft
  #isFitted = true;
  #fingers = new Map();

  // `takes` says whether a pointer that goes down is another's, as a mark's.
  constructor(stage, takes) {
    super();
    this.#stage = stage;
    new ResizeObserver(() => this.#resized()).observe(stage);
    stage.addEventListener("wheel", (event) => this.#wheel(event), { passive: false });
    stage.addEventListener("pointerdown", (event) => {
      if (event.button === 0 && !takes(event)) this.#down(event);
    });
    stage.addEventListener("pointermove", (event) => this.#move(event));
    for (const end of ["pointerup", "pointercancel"]) {
      stage.addEventListener(end, (event) => this.#fingers.delete(event.pointerId));
    }
  }

  show(box, near = box) {
    const isNew = !this.#box || [...this.#box, ...this.#near].some((value, k) => Math.abs(value - [...box, ...near][k]) > 1e-6);
    this.#box = box;
    this.#near = near;
    if (isNew && this.#isFitted) this.fit();
  }

  // As large as the stage lets it be: of a narrow sector the shaft may be cut off, it tells little.
  fit() {
    if (!this.#box) return;
    this.#isFitted = true;
    this.scale = this.#fitting(this.#near);
    const isWhole = this.#fitting(this.#box) > 0.999 * this.scale;
    const [x, y, width, height] = isWhole ? this.#box : this.#near;
    this.middle = { x: x + width / 2, y: y + height / 2 };
    this.tell("moved");
  }

  #fitting([, , width, height]) {
    return Math.min(this.size.width / width, this.size.height / height);
  }

  // A part of the drawing as large as it fits, with a little room.
  fitTo(x, y, width, height) {
    this.#isFitted = false;
    this.middle = { x: x + width / 2, y: y + height / 2 };
    this.scale = 0.96 * Math.min(this.size.width / width, this.size.height / height);
    this.tell("moved");
  }

  // Keep the point of the drawing that lies at px, py where it is.
  zoom(factor, px = this.size.width / 2, py = this.size.height / 2) {
    const at = this.toDrawing(px, py);
    const least = this.#box ? 0.5 * this.#fitting(this.#box) : 1;
    this.scale = Math.min(NEAREST, Math.max(least, this.scale * factor));
    this.middle = {
      x: at.x - (px - this.size.width / 2) / this.scale,
      y: at.y - (py - this.size.height / 2) / this.scale,
    };
    this.#isFitted = false;
    this.tell("moved");
  }

  pan(right, down) {
    const step = (PAN_STEP * this.size.width) / this.scale;
    this.middle = { x: this.middle.x + right * step, y: this.middle.y + down * step };
    this.#isFitted = false;
    this.tell("moved");
  }

  centre({ x, y }) {
    this.middle = { x, y };
    this.#isFitted = false;
    this.tell("moved");
  }

  toDrawing(px, py) {
    return {
      x: this.middle.x + (px - this.size.width / 2) / this.scale,
      y: this.middle.y + (py - this.size.height / 2) / this.scale,
    };
  }

  toStage(x, y) {
    return {
      x: (x - this.middle.x) * this.scale + this.size.width / 2,
      y: (y - this.middle.y) * this.scale + this.size.height / 2,
    };
  }

  // Where a pointer is, in pixels of the stage.
  place(event) {
    const box = this.#stage.getBoundingClientRect();
    return { x: event.clientX - box.left, y: event.clientY - box.top };
  }

  get viewBox() {
    const [width, height] = [this.size.width / this.scale, this.size.height / this.scale];
    return `${this.middle.x - width / 2} ${this.middle.y - height / 2} ${width} ${height}`;
  }

  #resized() {
    const box = this.#stage.getBoundingClientRect();
    this.size = { width: Math.max(1, box.width), height: Math.max(1, box.height) };
    if (this.#isFitted) this.fit();
    this.tell("moved");
  }

  #wheel(event) {
    event.preventDefault();
    const { x, y } = this.place(event);
    this.zoom(Math.exp(-event.deltaY * (event.deltaMode ? 0.05 : 0.0015)), x, y);
  }

  #down(event) {
    this.#fingers.set(event.pointerId, this.place(event));
    this.#stage.setPointerCapture(event.pointerId);
  }

  #move(event) {
    const before = this.#fingers.get(event.pointerId);
    if (!before) return;
    const now = this.place(event);
    const other = [...this.#fingers].find(([id]) => id !== event.pointerId)?.[1];
    const share = other ? 0.5 : 1; // two fingers move their middle by half of each
    this.middle = {
      x: this.middle.x - (share * (now.x - before.x)) / this.scale,
      y: this.middle.y - (share * (now.y - before.y)) / this.scale,
    };
    this.#isFitted = false;
    this.#fingers.set(event.pointerId, now);
    if (other) {
      const gap = (one) => Math.max(8, Math.hypot(one.x - other.x, one.y - other.y));
      this.zoom(gap(now) / gap(before), (now.x + other.x) / 2, (now.y + other.y) / 2);
    } else {
      this.tell("moved");
    }
  }
}
