// Verdicts: what is wanted, what is under way, what is known. Results stay by the design's hash, so
// that undo shows the earlier verdict at once; whatever is missing is asked for again after the
// socket was lost, and the last full job is taken up again after a reload. Whether a design has a
// full verdict that another window or an earlier start asked for is looked up when it is shown.

import { Teller } from "./dom.js";

const MOST_RESULTS = 60;
const UNDER_WAY = "lamwright-full-job"; // path and text of this window's full job

export class Work extends Teller {
  #link;
  #results = new Map(); // "effort hash" -> {job, result}
  #jobs = { coarse: null, full: null }; // {ticket, path, text, job, state, phase, share, error, findings}
  #ticket = 0;
  #look = null; // {ticket, path, text, job}: the last design that was looked up
  #isTakenUp = false;

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
    this.#remember();
    this.tell("changed", effort);
  }

  // Whether a full verdict of the design is finished or under way, whoever asked for it.
  look(hash, path, text) {
    if (this.#results.has(`full ${hash}`)) return;
    const full = this.#jobs.full;
    if (isUnderWay(full) && full.text === text) return;
    this.#look = { ticket: ++this.#ticket, path, text, job: null };
    this.#link.send({ look: hash, ticket: this.#look.ticket });
  }

  // The full verdict under way, ended.
  stop() {
    const full = this.#jobs.full;
    if (!full || !isUnderWay(full)) return false;
    if (full.job) this.#link.send({ cancel: full.job });
    this.#jobs.full = { ...full, state: "stopped" };
    this.#remember();
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
    const own = this.#isTakenUp ? null : remembered();
    this.#isTakenUp = true;
    if (own && !this.#jobs.full) this.want("full", own.path, own.text);
  }

  #received(message) {
    const effort = this.#effortOf(message);
    if (!effort) {
      this.#found(message);
      return;
    }
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
      if (effort === "full" && !own.job && job) this.tell("begun");
      Object.assign(own, { job: job ?? own.job, state, phase: phase ?? "", share: share ?? 0, error });
      if (message.result) this.#keep(effort, job, message.result); // figures, while pictures are drawn
      if (state === "none") this.#ask(effort); // the server does not know it any more
    }
    this.#remember();
    this.tell("changed", effort);
  }

  // What was looked up: finished, or under way and followed as if it had been asked for here.
  #found({ kind, ticket, job, state, result }) {
    const look = this.#look;
    if (!look || (ticket !== look.ticket && job !== look.job)) return;
    look.job = job;
    if (kind === "job" && ["waiting", "running"].includes(state) && !isUnderWay(this.#jobs.full)) {
      this.#jobs.full = { ...look, state, phase: "", share: 0 };
      this.#remember();
    }
    if (result) this.#keep("full", job, result);
    this.tell("changed", "full");
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

  #remember() {
    const { path, text } = this.#jobs.full ?? {};
    try {
      if (isUnderWay(this.#jobs.full)) sessionStorage.setItem(UNDER_WAY, JSON.stringify({ path, text }));
      else sessionStorage.removeItem(UNDER_WAY);
    } catch { /* storage full: a reload forgets that it was asked for, the server does not */ }
  }
}

function remembered() {
  try {
    return JSON.parse(sessionStorage.getItem(UNDER_WAY));
  } catch {
    return null; // unreadable: none
  }
}

function isUnderWay(job) {
  return ["asked", "waiting", "running"].includes(job?.state);
}
