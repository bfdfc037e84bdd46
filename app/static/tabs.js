// Tabs beside the drawing: arrow keys go between them, as the pattern of tab lists has it.

import { byId, set, Teller } from "./dom.js";

export class Tabs extends Teller {
  #tabs = [...document.querySelectorAll("[role=tab]")];

  constructor() {
    super();
    for (const tab of this.#tabs) {
      tab.addEventListener("click", () => this.#select(tab));
      tab.addEventListener("keydown", (event) => {
        const step = { ArrowRight: 1, ArrowLeft: -1 }[event.key];
        if (!step) return;
        const seen = this.#tabs.filter((one) => !one.hidden);
        const next = seen[(seen.indexOf(tab) + step + seen.length) % seen.length];
        this.#select(next);
        next.focus();
      });
    }
  }

  get shown() {
    return this.#tabs.find((tab) => tab.getAttribute("aria-selected") === "true").id.replace("tab-", "");
  }

  choose(name, isFocused = false) {
    const tab = byId(`tab-${name}`);
    tab.hidden = false;
    this.#select(tab);
    if (isFocused) (name === "text" ? byId("text") : tab).focus();
  }

  #select(chosen) {
    for (const tab of this.#tabs) {
      set(tab, { "aria-selected": String(tab === chosen), tabindex: tab === chosen ? 0 : -1 });
      byId(tab.getAttribute("aria-controls")).hidden = tab !== chosen;
    }
    this.tell("chosen", chosen.id.replace("tab-", ""));
  }
}
