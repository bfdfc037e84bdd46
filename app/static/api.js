// Requests to the server. Every fault is one of two: the server answered no (Refused, with its line
// and status), or it did not answer (Gone).

import { currentToken } from "./token.js";

export class Refused extends Error {
  constructor(status, line) {
    super(line);
    this.status = status;
  }
}

export class Gone extends Error {}

export async function get(path, query = {}) {
  return (await ask(`${path}?${new URLSearchParams(query)}`)).json();
}

// `signal` gives the question up.
export async function post(path, body, signal = null) {
  return (await ask(path, { method: "POST", headers: { "Content-Type": "application/json" }, body: JSON.stringify(body), signal })).json();
}

export async function getBytes(path) {
  return (await ask(path)).arrayBuffer();
}

export async function getBlob(path) {
  return (await ask(path)).blob();
}

let onGone = () => {};

export function whenGone(call) {
  onGone = call;
}

async function ask(path, options = {}) {
  let answer;
  try {
    answer = await fetch(path, { ...options, headers: { ...options.headers, "X-Page-Token": currentToken() } });
  } catch {
    if (options.signal?.aborted) throw new Gone("given up");
    onGone();
    throw new Gone("the server does not answer");
  }
  if (answer.ok) return answer;
  let line = `the server answered ${answer.status}`;
  try {
    line = (await answer.json()).error ?? line;
  } catch { /* no JSON: the status says it */ }
  if (answer.status === 403 && line.includes("token")) onGone();
  throw new Refused(answer.status, line);
}
