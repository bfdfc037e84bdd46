// Undo and redo: the texts that a design had, in this tab, kept over a reload.

const MOST_TEXTS = 200;
const MOST_CHARACTERS = 1_500_000; // a session's storage holds about 5 million

export class History {
  #name;
  #steps = [];
  #at = -1;

  constructor(path) {
    this.#name = `lamwright-history ${path}`;
    try {
      const kept = JSON.parse(sessionStorage.getItem(this.#name));
      if (kept?.steps?.length) [this.#steps, this.#at] = [kept.steps, kept.at];
    } catch { /* unreadable: begin anew */ }
  }

  get text() {
    return this.#steps[this.#at]?.text ?? null;
  }

  get undoes() {
    return this.#at > 0 ? this.#steps[this.#at].what : null;
  }

  get redoes() {
    return this.#steps[this.#at + 1]?.what ?? null;
  }

  // A new text; what was undone before is gone. The same text again is no step.
  push(text, what) {
    if (text === this.text) return;
    this.#steps = [...this.#steps.slice(0, this.#at + 1), { text, what }];
    let characters = this.#steps.reduce((sum, step) => sum + step.text.length, 0);
    while (this.#steps.length > 1 && (this.#steps.length > MOST_TEXTS || characters > MOST_CHARACTERS)) {
      characters -= this.#steps.shift().text.length;
    }
    this.#at = this.#steps.length - 1;
    this.#keep();
  }

  undo() {
    return this.#go(-1);
  }

  redo() {
    return this.#go(1);
  }

  #go(step) {
    if (!this.#steps[this.#at + step]) return null;
    this.#at += step;
    this.#keep();
    return this.text;
  }

  #keep() {
    try {
      sessionStorage.setItem(this.#name, JSON.stringify({ steps: this.#steps, at: this.#at }));
    } catch { /* storage full: undo works until the reload, drafts are on the server */ }
  }
}
