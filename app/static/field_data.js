// The binary field of a job: arrays over two meshes, what each picture shows of them, and the
// value at a point.
//
// Layout: uint32 length of the JSON head, the head, then the arrays at the offsets that it gives.

const PICTURES = {
  b: { mesh: "field", array: "field_b", range: "b", unit: "T", name: "flux density", ramp: "magnitude", lines: "field_a_z", above: 0.001 },
  a: { mesh: "field", array: "field_a_z", range: "a_z", unit: "Wb/m", name: "vector potential", ramp: "signed", lines: "field_a_z" },
  stress: { mesh: "stress", array: "stress_von_mises", range: "von_mises", unit: "MPa", name: "von Mises stress", ramp: "magnitude", lines: null, above: 0.004 },
};
// `above`: the share of the area whose values lie above the brightest colour; a single corner's peak
// would leave the rest of the picture dark.
const BINS = 1000;
const CLEAR = 0.85; // of the highest value: a colour scale that ends so near it may as well end there
const LINES = 24; // of equal flux between them
const CELLS = 64; // along either side of the grid that finds triangles

export class FieldData {
  #arrays = new Map();
  #head;
  #grids = new Map();

  constructor(buffer) {
    const length = new DataView(buffer).getUint32(0, true);
    this.#head = JSON.parse(new TextDecoder().decode(new Uint8Array(buffer, 4, length)));
    for (const { name, type, shape, offset } of this.#head.arrays) {
      const count = shape.reduce((product, size) => product * size, 1);
      const View = type === "u4" ? Uint32Array : Float32Array;
      this.#arrays.set(name, new View(buffer, 4 + length + offset, count));
    }
  }

  // What a picture draws; null if the job has none of it.
  picture(name) {
    const spec = PICTURES[name];
    const values = this.#arrays.get(spec.array);
    if (!values) return null;
    const positions = this.#arrays.get(`${spec.mesh}_positions`);
    const triangles = this.#arrays.get(`${spec.mesh}_triangles`);
    const [low, high] = this.#head.ranges?.[spec.range] ?? extremes(values);
    const lines = spec.lines ? this.#arrays.get(spec.lines) : null;
    const span = lines ? extremes(lines) : [0, 0];
    const isPerTriangle = values.length === triangles.length / 3 && values.length !== positions.length / 2;
    const isSigned = spec.ramp === "signed";
    const bound = isSigned ? Math.max(-low, high) : high;
    const brightest = spec.above ? topOf({ positions, triangles, values, isPerTriangle }, bound, spec.above) : bound;
    const isCut = brightest < CLEAR * bound;
    return {
      ...spec, positions, triangles, values, isPerTriangle, isCut, lines,
      low: isSigned ? -bound : low, high: isCut ? brightest : bound,
      spacing: lines ? (span[1] - span[0]) / LINES : 0,
      greatest: this.#greatest(values, positions, triangles, isSigned),
    };
  }

  // The value at x, y in mm; null outside.
  valueAt(picture, x, y) {
    const { positions: p, triangles: t, values } = picture;
    const grid = this.#grid(picture);
    for (const k of grid.cell(x, y)) {
      const [a, b, c] = [2 * t[3 * k], 2 * t[3 * k + 1], 2 * t[3 * k + 2]];
      const area = (p[b] - p[a]) * (p[c + 1] - p[a + 1]) - (p[c] - p[a]) * (p[b + 1] - p[a + 1]);
      const v = ((x - p[a]) * (p[c + 1] - p[a + 1]) - (p[c] - p[a]) * (y - p[a + 1])) / area;
      const w = ((p[b] - p[a]) * (y - p[a + 1]) - (x - p[a]) * (p[b + 1] - p[a + 1])) / area;
      if (v < -1e-6 || w < -1e-6 || v + w > 1 + 1e-6) continue;
      if (picture.isPerTriangle) return values[k];
      return (1 - v - w) * values[a / 2] + v * values[b / 2] + w * values[c / 2];
    }
    return null;
  }

  #grid({ mesh, positions, triangles }) {
    if (!this.#grids.has(mesh)) this.#grids.set(mesh, new Grid(positions, triangles));
    return this.#grids.get(mesh);
  }

  #greatest(values, positions, triangles, isSigned) {
    let best = 0;
    const size = isSigned ? Math.abs : (value) => value;
    for (let k = 1; k < values.length; k += 1) if (size(values[k]) > size(values[best])) best = k;
    const node = values.length === positions.length / 2 ? best : triangles[3 * best];
    return { value: values[best], x: positions[2 * node], y: positions[2 * node + 1] };
  }
}

// Triangles by the cells of a square grid that their boxes touch.
class Grid {
  #cells = new Map();
  #low;
  #size;

  constructor(positions, triangles) {
    const [xs, ys] = [0, 1].map((axis) => extremes(positions.filter((_, k) => k % 2 === axis)));
    this.#low = [xs[0], ys[0]];
    this.#size = Math.max(xs[1] - xs[0], ys[1] - ys[0]) / CELLS || 1;
    for (let k = 0; k < triangles.length / 3; k += 1) {
      const nodes = [0, 1, 2].map((n) => 2 * triangles[3 * k + n]);
      const [i0, i1] = extremes(nodes.map((n) => this.#index(positions[n], 0)));
      const [j0, j1] = extremes(nodes.map((n) => this.#index(positions[n + 1], 1)));
      for (let i = i0; i <= i1; i += 1) for (let j = j0; j <= j1; j += 1) this.#put(i * 4096 + j, k);
    }
  }

  cell(x, y) {
    return this.#cells.get(this.#index(x, 0) * 4096 + this.#index(y, 1)) ?? [];
  }

  #index(value, axis) {
    return Math.floor((value - this.#low[axis]) / this.#size);
  }

  #put(key, k) {
    if (!this.#cells.has(key)) this.#cells.set(key, []);
    this.#cells.get(key).push(k);
  }
}

// The value between 0 and `most` above which a share of the area lies.
function topOf({ positions: p, triangles: t, values, isPerTriangle }, most, share) {
  const areas = new Float64Array(BINS);
  let total = 0;
  for (let k = 0; k < t.length; k += 3) {
    const [a, b, c] = [t[k], t[k + 1], t[k + 2]];
    const area = Math.abs((p[2 * b] - p[2 * a]) * (p[2 * c + 1] - p[2 * a + 1]) - (p[2 * c] - p[2 * a]) * (p[2 * b + 1] - p[2 * a + 1]));
    const value = isPerTriangle ? values[k / 3] : (values[a] + values[b] + values[c]) / 3;
    areas[Math.min(BINS - 1, Math.max(0, Math.floor((BINS * value) / most)))] += area;
    total += area;
  }
  let [bin, above] = [BINS, 0];
  while (bin > 1 && above <= share * total) above += areas[(bin -= 1)];
  return (most * (bin + 1)) / BINS;
}

function extremes(values) {
  let [low, high] = [Infinity, -Infinity];
  for (const value of values) {
    if (value < low) low = value;
    if (value > high) high = value;
  }
  return [low, high];
}
