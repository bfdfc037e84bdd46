// A field on a plain canvas, where there is no WebGL2: one colour per triangle, no lines. Triangles
// are gathered by colour, since setting one costs more than adding a triangle to a path.

import { ramp } from "./colours.js";

const COLOURS = 64;

export class FieldCanvas {
  #context;
  #picture = null;

  constructor(canvas) {
    this.#context = canvas.getContext("2d");
  }

  show(picture) {
    this.#picture = picture;
  }

  draw({ middle, scale, size }, ratio) {
    const context = this.#context;
    context.setTransform(1, 0, 0, 1, 0, 0);
    context.clearRect(0, 0, context.canvas.width, context.canvas.height);
    if (!this.#picture) return;
    context.setTransform(ratio * scale, 0, 0, ratio * scale, ratio * (size.width / 2 - middle.x * scale), ratio * (size.height / 2 - middle.y * scale));
    context.lineWidth = 0.6 / scale;
    const colours = ramp(this.#picture.ramp);
    this.#gathered().forEach((path, k) => {
      if (!path) return;
      const at = 4 * Math.round((255 * k) / (COLOURS - 1));
      context.fillStyle = context.strokeStyle = `rgb(${colours[at]} ${colours[at + 1]} ${colours[at + 2]})`;
      context.fill(path);
      context.stroke(path); // closes the seams between neighbours
    });
  }

  #gathered() {
    const { positions: p, triangles: t, values, isPerTriangle, low, high } = this.#picture;
    const paths = new Array(COLOURS);
    for (let k = 0; k < t.length; k += 3) {
      const value = isPerTriangle ? values[k / 3] : (values[t[k]] + values[t[k + 1]] + values[t[k + 2]]) / 3;
      const share = Math.min(1, Math.max(0, (value - low) / (high - low || 1)));
      const path = (paths[Math.round(share * (COLOURS - 1))] ??= new Path2D());
      path.moveTo(p[2 * t[k]], p[2 * t[k] + 1]);
      path.lineTo(p[2 * t[k + 1]], p[2 * t[k + 1] + 1]);
      path.lineTo(p[2 * t[k + 2]], p[2 * t[k + 2] + 1]);
      path.closePath();
    }
    return paths;
  }
}
