// Keys of the page: each action has one, all are listed in the help, and the part of the page that
// does the same names its key. Keys without Ctrl do nothing while a text is typed, and can be
// switched off for who speaks to the page.

import { byId, el, set } from "./dom.js";

const SINGLE = "lamwright-single-keys";

export class Keys {
  #actions = [];

  constructor() {
    document.addEventListener("keydown", (event) => this.#pressed(event));
    const box = byId("single-keys");
    box.checked = localStorage.getItem(SINGLE) !== "off";
    box.addEventListener("change", () => {
      localStorage.setItem(SINGLE, box.checked ? "on" : "off");
      this.#mark();
    });
  }

  // `keys`: like "Ctrl+Shift+Z" or "k"; the first is the one that is listed. `part` selects what on
  // the page does the same.
  add(group, keys, what, call, part) {
    this.#actions.push({ group, keys: [keys].flat(), what, call, part });
  }

  #mark() {
    for (const { keys, part } of this.#actions) {
      if (!part) continue;
      const own = keys.filter((key) => key.startsWith("Ctrl") || byId("single-keys").checked);
      const named = own.map((key) => upper(key).replace("Ctrl", "Control").replace(/^\+$/, "Plus"));
      for (const node of document.querySelectorAll(part)) set(node, { "aria-keyshortcuts": named.join(" ") || null });
    }
  }

  list(host) {
    this.#mark();
    const groups = [...new Set(this.#actions.map((action) => action.group))];
    host.replaceChildren(...groups.map((group) => el("section", {}, el("h3", {}, group), el("dl", { class: "keys" },
      ...this.#actions.filter((action) => action.group === group).flatMap((action) => [
        el("dt", {}, ...parts(action.keys[0]).map((key) => el("kbd", {}, named(key)))), el("dd", {}, action.what)])))));
  }

  #pressed(event) {
    if (event.defaultPrevented || event.altKey) return;
    const isControl = event.ctrlKey || event.metaKey;
    const name = `${isControl ? "Ctrl+" : ""}${event.shiftKey && isControl ? "Shift+" : ""}${event.key.length === 1 ? event.key.toUpperCase() : event.key}`;
    const action = this.#actions.find(({ keys }) => keys.some((one) => upper(one) === name));
    if (!action || !action.call) return;
    if (!isControl) {
      if (isTyping(event.target) || !byId("single-keys").checked) return;
    }
    if (document.querySelector("dialog[open]")) return;
    event.preventDefault();
    action.call();
  }
}

function upper(keys) {
  return parts(keys).map((key) => (key.length === 1 ? key.toUpperCase() : key)).join("+");
}

function parts(keys) {
  return keys === "+" ? ["+"] : keys.split("+");
}

function named(key) {
  return key.length === 1 ? key.toUpperCase() : key;
}

function isTyping(target) {
  return target.matches("textarea, select, input:not([type=checkbox], [type=radio], [type=button])");
}
