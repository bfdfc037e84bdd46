// Releases and sweeps that the server runs: begun here, asked for by polling, stopped by a button.

import { Gone, get, post, Refused } from "./api.js";
import { Teller } from "./dom.js";

const EVERY_MS = 700;
const LOST = {
  release: "the server was started anew meanwhile: nothing was released, release again",
  sweep: "the server was started anew meanwhile: finished designs are kept, Sweep goes on with them",
};

export class Tasks extends Teller {
  #timer = 0;
  #start = null; // which start of the server the numbers of tasks are of
  #known = new Map();

  get all() {
    return [...this.#known.values()];
  }

  async begin(kind, body) {
    const record = await post(`/api/${kind}`, body);
    this.#known.set(this.#keyOf(record.task), record);
    this.tell("changed");
    this.#poll();
  }

  // What the server runs, as after a reload. A server that was started anew knows none of before:
  // what was under way then has ended with it.
  async refresh() {
    const { tasks, start } = await get("/api/tasks");
    if (this.#start !== null && this.#start !== start) this.#ended();
    this.#start = start;
    for (const one of tasks) this.#known.set(this.#keyOf(one.task), one);
    this.tell("changed");
    this.#poll();
  }

  #ended() {
    for (const [key, one] of this.#known) {
      if (isOpen(one)) this.#known.set(key, { ...one, state: "stopped", error: LOST[one.kind] });
    }
  }

  // Two starts of the server give the same numbers.
  #keyOf(task) {
    return `${this.#start} ${task}`;
  }

  stop(task) {
    return post(`/api/tasks/${encodeURIComponent(task)}/stop`, {});
  }

  #poll() {
    clearTimeout(this.#timer);
    const open = this.all.filter(isOpen);
    if (!open.length) return;
    this.#timer = setTimeout(async () => {
      for (const one of open) {
        try {
          const now = await get(`/api/tasks/${encodeURIComponent(one.task)}`);
          this.#known.set(this.#keyOf(one.task), now);
          if (!isOpen(now)) this.tell("ended", now);
        } catch (error) {
          if (!(error instanceof Gone || error instanceof Refused)) throw error; // refresh tells
        }
      }
      this.tell("changed");
      this.#poll();
    }, EVERY_MS);
  }
}

export function isOpen(task) {
  return ["waiting", "running"].includes(task.state);
}
