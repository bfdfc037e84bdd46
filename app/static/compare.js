// The design that is kept for comparison: its outline and figures, for this tab, over a reload.

import { Teller } from "./dom.js";

const KEY = "lamwright-kept";

export class Kept extends Teller {
  value = null; // {name, hash, drawing, job, result}

  constructor() {
    super();
    try {
      this.value = JSON.parse(sessionStorage.getItem(KEY));
    } catch { /* unreadable: none kept */ }
  }

  keep(name, hash, drawing, known) {
    this.value = { name, hash, drawing, job: known?.job ?? null, result: known?.result ?? null };
    this.#store();
  }

  // Figures that came after it was kept.
  fill(known) {
    if (!this.value || this.value.result || known?.result.design_hash !== this.value.hash) return;
    Object.assign(this.value, { job: known.job, result: known.result });
    this.#store();
  }

  drop() {
    this.value = null;
    this.#store();
  }

  #store() {
    try {
      if (this.value) sessionStorage.setItem(KEY, JSON.stringify(this.value));
      else sessionStorage.removeItem(KEY);
    } catch { /* too large for the storage: it lasts until the reload */ }
    this.tell("changed");
  }
}
