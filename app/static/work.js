// Verdicts: what is wanted, what is under way, what is known. Results stay by the design's hash, so
// that undo shows the earlier verdict at once; whatever is missing is asked for again after the
// socket was lost, and the last full job is watched again after a reload.

import { Teller } from "./dom.js";

const MOST_RESULTS = 60;
const WATCHED = "lamwright-full-job";

export class Work extends Teller {
  #link;
  #results = new Map(); // "effort hash" -> {job, result}
  #jobs = { coarse: null, full: null }; // {ticket, path, text, job, state, phase, share, error, findings}
  #ticket = 0;

  constructor(link) {
    super();
    this.#link = link;
    link.on("message", (message) => this.#received(message));
    link.on("state", (state) => state === "on" && this.#again());
  }

  want(effort, path, text) {
    const before = this.#jobs[effort];
    if (before && before.text === text && before.path === path && isUnderWay(before)) return;
    this.#jobs[effort] = { ticket: ++this.#ticket, path, text, job: null, state: "asked", phase: "", share: 0 };
    this.#ask(effort);
    this.tell("changed", effort);
  }

  // The full verdict under way, ended.
  stop() {
    const full = this.#jobs.full;
    if (!full || !isUnderWay(full)) return false;
    if (full.job) this.#link.send({ cancel: full.job });
    this.#jobs.full = { ...full, state: "stopped" };
    this.#remember(null);
    this.tell("changed", "full");
    return true;
  }

  of(effort) {
    return this.#jobs[effort];
  }

  isUnderWay(effort) {
    return isUnderWay(this.#jobs[effort]);
  }

  // The best that is known of a design: {job, result}, the full one first.
  known(hash) {
    return this.#results.get(`full ${hash}`) ?? this.#results.get(`coarse ${hash}`) ?? null;
  }

  // The job whose field is of a design: fields come with coarse verdicts.
  fieldJob(hash) {
    return this.#results.get(`coarse ${hash}`)?.job ?? null;
  }

  #ask(effort) {
    const { path, text, ticket } = this.#jobs[effort];
    this.#link.send({ want: effort, path, text, ticket });
  }

  #again() {
    for (const effort of ["coarse", "full"]) if (isUnderWay(this.#jobs[effort])) this.#ask(effort);
    const job = sessionStorage.getItem(WATCHED);
    if (job && !this.#jobs.full) {
      this.#jobs.full = { ticket: ++this.#ticket, path: null, text: null, job, state: "asked", phase: "", share: 0 };
      this.#link.send({ watch: job });
    }
  }

  #received(message) {
    const effort = this.#effortOf(message);
    if (!effort) return;
    const own = this.#jobs[effort];
    if (message.kind === "refused") {
      Object.assign(own, { state: "refused", findings: message.findings });
    } else if (message.kind === "done") {
      Object.assign(own, { state: "done", share: 1 });
      this.#keep(effort, message.job, message.result);
    } else if (message.kind === "failed") {
      Object.assign(own, { state: "failed", error: message.error });
    } else if (message.kind === "superseded") {
      if (own.state !== "done") Object.assign(own, { state: effort === "full" ? "stopped" : "superseded" });
    } else {
      const { job, state, phase, share, error } = message;
      Object.assign(own, { job: job ?? own.job, state, phase: phase ?? "", share: share ?? 0, error });
      if (state === "none") this.#lost(effort, own);
    }
    if (effort === "full") this.#remember(["failed", "stopped", "refused", "none"].includes(own.state) ? null : own.job);
    this.tell("changed", effort);
  }

  // A job that the server does not know (any more): begin it again if its text is known here.
  #lost(effort, own) {
    if (own.text === null) this.#jobs[effort] = null;
    else this.#ask(effort);
  }

  #effortOf(message) {
    for (const effort of ["coarse", "full"]) {
      const own = this.#jobs[effort];
      if (own && (message.ticket === own.ticket || (message.job && message.job === own.job))) return effort;
    }
    return null;
  }

  #keep(effort, job, result) {
    const key = `${effort} ${result.design_hash}`;
    this.#results.delete(key);
    this.#results.set(key, { job, effort, result });
    if (this.#results.size > MOST_RESULTS) this.#results.delete(this.#results.keys().next().value);
  }

  #remember(job) {
    if (job) sessionStorage.setItem(WATCHED, job);
    else sessionStorage.removeItem(WATCHED);
  }
}

function isUnderWay(job) {
  return ["asked", "waiting", "running"].includes(job?.state);
}
