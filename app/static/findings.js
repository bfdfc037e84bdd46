// What is wrong with the outline, each finding with its place: the line of the text and the mark.

import { byId, el, set, setText } from "./dom.js";

export class Findings {
  #list = byId("findings-list");
  #head = byId("findings-head");
  #go;

  constructor(go) {
    this.#go = go;
  }

  show(outline) {
    const { ok, findings } = outline;
    setText(this.#head, ok ? "\u2713 Outline can be built" : `\u2717 ${findings.length} ${findings.length === 1 ? "finding" : "findings"} on the outline`);
    set(this.#head, { "data-passes": String(ok) });
    this.#list.replaceChildren(...findings.map((finding) => el("li", {},
      el("button", { type: "button", class: "finding", on: { click: () => this.#go(finding) } },
        finding.line ? el("span", { class: "place" }, `line ${finding.line}`) : null, el("span", {}, finding.text)))));
  }

  focusFirst() {
    this.#list.querySelector("button")?.focus();
  }
}

export function spoken(outline) {
  if (outline.ok) return "outline can be built";
  return `${outline.findings.length} on the outline: ${outline.findings.slice(0, 3).map((one) => one.text).join("; ")}`;
}
