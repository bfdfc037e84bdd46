// One line on top that says what is wrong with the page itself and what to do; gone when all is well.

import { byId, el } from "./dom.js";

export class StateLine {
  #host = byId("state-line");
  #states = new Map(); // name -> {text, buttons}; the first of ORDER is shown

  // buttons: [{text, call}].
  set(name, text, buttons = []) {
    this.#states.set(name, { text, buttons });
    this.#show();
  }

  clear(name) {
    if (this.#states.delete(name)) this.#show();
  }

  #show() {
    const name = ["gone", "strange", "fault", "stale", "apart"].find((one) => this.#states.has(one));
    this.#host.hidden = !name;
    this.#host.dataset.state = name ?? "";
    if (!name) {
      this.#host.replaceChildren();
      return;
    }
    const { text, buttons } = this.#states.get(name);
    this.#host.replaceChildren(el("span", {}, text), ...buttons.map(({ text: label, call }) => el("button", { type: "button", on: { click: call } }, label)));
  }
}
