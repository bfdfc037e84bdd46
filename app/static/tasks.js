// Releases and sweeps that the server runs: begun here, asked for by polling, stopped by a button.

import { Gone, get, post } from "./api.js";
import { Teller } from "./dom.js";

const EVERY_MS = 700;

export class Tasks extends Teller {
  #timer = 0;
  #known = new Map();

  get all() {
    return [...this.#known.values()];
  }

  async begin(kind, body) {
    const { task } = await post(`/api/${kind}`, body);
    this.#known.set(task, { task, kind, state: "waiting", share: 0, lines: [] });
    this.tell("changed");
    this.#poll();
    return task;
  }

  // What the server runs already, as after a reload.
  async refresh() {
    const answer = await get("/api/tasks");
    for (const one of answer.tasks ?? answer) this.#known.set(one.task, one);
    this.tell("changed");
    this.#poll();
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
          this.#known.set(one.task, now);
          if (!isOpen(now)) this.tell("ended", now);
        } catch (error) {
          if (!(error instanceof Gone)) this.#known.set(one.task, { ...one, state: "failed", error: error.message });
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
