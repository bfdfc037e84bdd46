// The socket for work that takes time, and whether the server is there at all.
//
// States: "joining", "on", "apart" (answers, but has no socket for us), "gone" (does not answer),
// "strange" (answers, but has another token).
// A lost socket is tried again after 0.3 s, then ever later up to 3 s, for as long as the page is open.

import { Teller } from "./dom.js";
import { currentToken, tokenIsTaken, tryAnother } from "./token.js";

const LONGEST_WAIT_MS = 3000;

export class Link extends Teller {
  state = "joining";
  #socket = null;
  #wait = 300;
  #timer = 0;

  open() {
    clearTimeout(this.#timer);
    this.#drop();
    const socket = new WebSocket(`ws://${location.host}/api/work`);
    this.#socket = socket;
    socket.addEventListener("open", () => socket.send(JSON.stringify({ token: currentToken() })));
    socket.addEventListener("message", ({ data }) => this.#received(JSON.parse(data)));
    socket.addEventListener("close", () => this.#closed(socket));
  }

  // Another token has come; one that the server takes is kept.
  offered() {
    if (this.state === "strange" && tryAnother()) this.open();
  }

  // False if it cannot be sent now; who wants it asks again when the state is "on".
  send(message) {
    if (this.state !== "on") return false;
    this.#socket.send(JSON.stringify(message));
    return true;
  }

  // A request found nobody: look again at once instead of when the socket notices.
  suspect() {
    if (this.state === "on") this.#closed(this.#socket);
  }

  #received(message) {
    if (message.kind === "ready") {
      this.#wait = 300;
      tokenIsTaken();
      this.#become("on");
    } else {
      this.tell("message", message);
    }
  }

  async #closed(socket) {
    if (socket !== this.#socket) return;
    this.#drop();
    let state = "gone";
    try {
      const answer = await fetch("/api/page", { headers: { "X-Page-Token": currentToken() } });
      state = answer.status === 403 ? "strange" : "apart";
    } catch { /* nobody there */ }
    if (this.#socket !== null) return;
    if (state === "strange" && tryAnother()) {
      this.open();
      return;
    }
    this.#become(state);
    this.#timer = setTimeout(() => this.open(), this.#wait);
    this.#wait = Math.min(LONGEST_WAIT_MS, this.#wait * 1.6);
  }

  #drop() {
    const socket = this.#socket;
    this.#socket = null;
    if (socket) socket.close();
  }

  #become(state) {
    if (state === this.state) return;
    this.state = state;
    this.tell("state", state);
  }
}
