// The section as SVG: regions by their material, the kept design's outline over it, a scale bar.
// Paths are changed in place: a drag alters a few of them, and the rest is not laid out again.

import { set, setText, svg } from "./dom.js";

export class Drawing {
  #picture;
  #regions = svg("g", { class: "regions" });
  #kept = svg("g", { class: "kept" });
  #viewport;
  #bar;

  constructor(picture, viewport, bar) {
    this.#picture = picture;
    this.#viewport = viewport;
    this.#bar = bar;
    picture.prepend(this.#regions, this.#kept);
    viewport.on("moved", () => this.#place());
  }

  show(drawing, isOld) {
    show(this.#regions, drawing?.regions ?? [], (region) => `m-${region.material} p-${region.part}${isGap(region) ? " gap" : ""}`);
    this.#picture.classList.toggle("is-old", isOld);
    if (drawing) this.#viewport.show(drawing.view, drawing.near);
  }

  // Outline of the kept design's rotor, or nothing.
  compare(drawing) {
    const rotor = (drawing?.regions ?? []).filter((region) => region.part === "rotor" && !isGap(region));
    show(this.#kept, rotor, () => "kept-line");
  }

  // As large as the rotor fits: its part of the drawing is where its iron lies.
  fitRotor() {
    const iron = this.#regions.querySelector(".m-rotor_steel");
    if (!iron) return;
    const { x, y, width, height } = iron.getBBox();
    this.#viewport.fitTo(x, y, width, height);
  }

  #place() {
    set(this.#picture, { viewBox: this.#viewport.viewBox });
    const millimetres = niceBelow(110 / this.#viewport.scale);
    this.#bar.querySelector(".scale-line").style.width = `${millimetres * this.#viewport.scale}px`;
    setText(this.#bar.querySelector(".scale-text"), `${millimetres} mm`);
  }
}

// The gap's layers are the mesh's; iron and slots have edges of their own.
function isGap({ name }) {
  return name.startsWith("gap");
}

function show(group, regions, classOf) {
  while (group.childElementCount > regions.length) group.lastElementChild.remove();
  while (group.childElementCount < regions.length) group.append(svg("path", { "fill-rule": "evenodd" }));
  regions.forEach((region, k) => set(group.children[k], { d: region.d, class: classOf(region) }));
}

// The largest of 1, 2, 5 times a power of ten that is no more than `value`.
export function niceBelow(value) {
  const power = 10 ** Math.floor(Math.log10(value) + 1e-9);
  const step = [5, 2, 1].find((one) => one * power <= value * (1 + 1e-9)) ?? 1;
  return Number((step * power).toPrecision(6));
}
