// The field's picture under the outline: fetched when it is first looked at, drawn by WebGL2 or a
// plain canvas, with a colour bar and the value under the pointer.

import { getBytes } from "./api.js";
import { ramp } from "./colours.js";
import { set, setText } from "./dom.js";
import { FieldCanvas } from "./field_canvas.js";
import { FieldData } from "./field_data.js";
import { FieldGl } from "./field_gl.js";
import { fixed, written } from "./format.js";

export class Field {
  kind = "outline"; // or b, a, stress
  #canvas;
  #viewport;
  #bar;
  #hint;
  #painter = null;
  #known = null; // {job, data}
  #wanted = null; // {job, note}
  #picture = null;
  #isAsked = false;
  #onShown;

  // `onShown(kind)`: which field lies under the outline now, or null.
  constructor({ canvas, bar, hint, stage }, viewport, onShown) {
    this.#canvas = canvas;
    this.#viewport = viewport;
    this.#bar = bar;
    this.#hint = hint;
    this.#onShown = onShown;
    viewport.on("moved", () => this.redraw());
    stage.addEventListener("pointermove", (event) => this.#point(event));
    stage.addEventListener("pointerleave", () => setText(this.#hint, ""));
  }

  // The job whose field is of the design on the sheet; `note` says if it is of another.
  async want(job, note = "") {
    this.#wanted = job ? { job, note } : null;
    await this.#update();
  }

  async choose(kind) {
    this.kind = kind;
    await this.#update();
  }

  async #update() {
    const { kind } = this;
    if (kind === "outline" || !this.#wanted) {
      this.#show(null, kind === "outline" ? "" : "no field yet: it comes with the verdict");
      return;
    }
    const { job, note } = this.#wanted;
    if (this.#known?.job !== job) {
      try {
        const data = new FieldData(await getBytes(`/api/jobs/${encodeURIComponent(job)}/field`));
        if (this.#wanted?.job !== job) return;
        this.#known = { job, data };
      } catch (error) {
        this.#show(null, `no field: ${error.message}`);
        return;
      }
    }
    if (kind !== this.kind) return;
    const picture = this.#known.data.picture(kind);
    this.#show(picture, picture ? note : "this verdict has no such picture");
  }

  #show(picture, note) {
    this.#picture = picture;
    this.#canvas.hidden = picture === null;
    this.#bar.hidden = picture === null && !note;
    this.#bar.querySelector(".ramp").hidden = picture === null;
    setText(this.#hint, "");
    setText(this.#bar.querySelector(".note"), note);
    if (picture) {
      this.#painter ??= painterOf(this.#canvas);
      this.#painter.show(picture);
      this.#label(picture);
      this.redraw();
    }
    for (const one of ["low", "high", "name", "greatest"]) {
      if (!picture) setText(this.#bar.querySelector(`.${one}`), "");
    }
    this.#onShown(picture && this.kind);
  }

  #label(picture) {
    const { greatest, low, high, isCut, unit, name } = picture;
    const part = (one) => this.#bar.querySelector(`.${one}`);
    setText(part("name"), `${name} in ${unit}`);
    setText(part("low"), written(low, 3));
    setText(part("high"), `${isCut ? "\u2265 " : ""}${written(high, 3)}`);
    setText(part("greatest"), `highest ${written(greatest.value, 3)} at ${fixed(greatest.x, 1)}, ${fixed(-greatest.y, 1)} mm`);
    const ramped = part("ramp");
    const context = ramped.getContext("2d");
    const image = context.createImageData(256, 1);
    image.data.set(ramp(picture.ramp));
    context.putImageData(image, 0, 0);
    set(this.#canvas, { "aria-label": `${name}, ${written(low, 3)} to ${written(high, 3)} ${unit}, ${part("greatest").textContent}` });
  }

  get picture() {
    return this.#picture;
  }

  // At a place of the drawing in mm; null outside.
  valueAt({ x, y }) {
    return this.#known.data.valueAt(this.#picture, x, y);
  }

  redraw() {
    if (!this.#picture || this.#isAsked) return;
    this.#isAsked = true;
    requestAnimationFrame(() => {
      this.#isAsked = false;
      if (!this.#picture) return;
      const ratio = window.devicePixelRatio || 1;
      const { width, height } = this.#viewport.size;
      const [w, h] = [Math.round(width * ratio), Math.round(height * ratio)];
      if (this.#canvas.width !== w || this.#canvas.height !== h) Object.assign(this.#canvas, { width: w, height: h });
      this.#painter.draw(this.#viewport, ratio);
    });
  }

  #point(event) {
    if (!this.#picture) return;
    const { x, y } = this.#viewport.place(event);
    this.hint(this.#viewport.toDrawing(x, y));
  }

  // The value at a place of the drawing, written beside it; null takes it away.
  hint(at) {
    const value = at && this.#picture ? this.valueAt(at) : null;
    setText(this.#hint, value === null ? "" : `${written(value, 3)} ${this.#picture.unit} at ${fixed(at.x, 1)}, ${fixed(-at.y, 1)} mm`);
    if (value === null) return;
    const { x, y } = this.#viewport.toStage(at.x, at.y);
    Object.assign(this.#hint.style, { left: `${x + 16}px`, top: `${y + 18}px` });
    this.#hint.classList.toggle("is-left", x > this.#viewport.size.width - 230);
    this.#hint.classList.toggle("is-above", y > this.#viewport.size.height - 44);
  }
}

function painterOf(canvas) {
  try {
    return new FieldGl(canvas);
  } catch {
    return new FieldCanvas(canvas);
  }
}
