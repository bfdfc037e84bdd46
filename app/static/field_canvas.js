// A field on a plain canvas, where there is no WebGL2: one colour per triangle, lines of equal vector
// potential across them. Triangles are gathered by colour, since setting one costs more than adding
// a triangle to a path; all paths are made once for a picture, in mm.

import { ramp } from "./colours.js";

const COLOURS = 64;
const PENS = { magnitude: "rgb(255 255 255 / .62)", signed: "rgb(8 15 20 / .5)" };

export class FieldCanvas {
  #context;
  #picture = null;
  #areas = [];
  #lines = null;

  constructor(canvas) {
    this.#context = canvas.getContext("2d");
  }

  show(picture) {
    this.#picture = picture;
    this.#areas = this.#gathered();
    this.#lines = picture.lines ? linesOf(picture) : null;
  }

  draw({ middle, scale, size }, ratio) {
    const context = this.#context;
    context.setTransform(1, 0, 0, 1, 0, 0);
    context.clearRect(0, 0, context.canvas.width, context.canvas.height);
    if (!this.#picture) return;
    context.setTransform(ratio * scale, 0, 0, ratio * scale, ratio * (size.width / 2 - middle.x * scale), ratio * (size.height / 2 - middle.y * scale));
    context.lineWidth = 0.6 / scale;
    const colours = ramp(this.#picture.ramp);
    this.#areas.forEach((path, k) => {
      if (!path) return;
      const at = 4 * Math.round((255 * k) / (COLOURS - 1));
      context.fillStyle = context.strokeStyle = `rgb(${colours[at]} ${colours[at + 1]} ${colours[at + 2]})`;
      context.fill(path);
      context.stroke(path); // closes the seams between neighbours
    });
    if (!this.#lines) return;
    context.lineWidth = 1 / scale;
    context.strokeStyle = PENS[this.#picture.ramp];
    context.stroke(this.#lines);
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

// Straight pieces of the lines of equal value, triangle by triangle.
function linesOf({ positions: p, triangles: t, lines, spacing }) {
  const path = new Path2D();
  for (let k = 0; k < t.length; k += 3) {
    const nodes = [t[k], t[k + 1], t[k + 2]].sort((a, b) => lines[a] - lines[b]);
    const [low, middle, high] = nodes.map((node) => lines[node]);
    for (let level = Math.ceil(low / spacing) * spacing; level < high; level += spacing) {
      const [a, b] = level < middle ? [nodes[0], nodes[1]] : [nodes[1], nodes[2]];
      path.moveTo(...between(p, lines, nodes[0], nodes[2], level));
      path.lineTo(...between(p, lines, a, b, level));
    }
  }
  return path;
}

function between(p, values, a, b, level) {
  const share = (level - values[a]) / (values[b] - values[a] || 1);
  return [p[2 * a] + share * (p[2 * b] - p[2 * a]), p[2 * a + 1] + share * (p[2 * b + 1] - p[2 * a + 1])];
}
