// The design file's text beside the drawing: line numbers, marked lines of findings.

import { byId, el } from "./dom.js";

const PAUSE_MS = 500;

export class Editor {
  #area = byId("text");
  #lines = byId("text-lines");
  #timer = 0;
  #marked = new Set();
  #count = 0;

  // `accept(text)`: the text after a pause of typing.
  constructor(accept) {
    this.accept = () => {
      clearTimeout(this.#timer);
      this.#timer = 0;
      accept(this.#area.value);
    };
    this.#area.addEventListener("input", () => {
      clearTimeout(this.#timer);
      this.#timer = setTimeout(this.accept, PAUSE_MS);
      this.#number();
    });
    this.#area.addEventListener("blur", () => this.flush());
    this.#area.addEventListener("scroll", () => {
      this.#lines.scrollTop = this.#area.scrollTop;
    });
    this.#area.addEventListener("keydown", (event) => {
      // Tab leaves the field, as everywhere; Ctrl-] would be an editor's, which this is not.
      if (event.key === "Escape") this.#area.blur();
    });
  }

  // Hand over at once what is typed.
  flush() {
    if (this.#timer) this.accept();
  }

  show(text) {
    if (this.#timer || this.#area.value === text) return;
    const { selectionStart: start, selectionEnd: end, scrollTop } = this.#area;
    this.#area.value = text;
    this.#area.setSelectionRange(start, end);
    this.#area.scrollTop = scrollTop;
    this.#number();
  }

  mark(findings) {
    const lines = new Set(findings.map((finding) => finding.line).filter(Boolean));
    if (lines.size !== this.#marked.size || [...lines].some((line) => !this.#marked.has(line))) this.#count = 0;
    this.#marked = lines;
    this.#number();
  }

  goTo(line) {
    const lines = this.#area.value.split("\n");
    const start = lines.slice(0, line - 1).reduce((sum, one) => sum + one.length + 1, 0);
    this.#area.focus();
    this.#area.setSelectionRange(start, start + (lines[line - 1]?.length ?? 0));
    const height = this.#area.scrollHeight / lines.length;
    this.#area.scrollTop = Math.max(0, (line - 6) * height);
  }

  #number() {
    const count = this.#area.value.split("\n").length;
    if (count === this.#count) return;
    this.#count = count;
    this.#lines.replaceChildren(...Array.from({ length: count }, (_, k) => el("span", { class: this.#marked.has(k + 1) ? "marked" : null }, String(k + 1))));
    this.#lines.scrollTop = this.#area.scrollTop;
  }
}
