// Elements from plain data. Texts always become text nodes: nothing of a design is ever markup.

const SVG = "http://www.w3.org/2000/svg";

// Properties: "class", "on" (listeners by name), "data", anything else an attribute; null leaves out.
export function el(tag, properties = {}, ...children) {
  return fill(document.createElement(tag), properties, children);
}

export function svg(tag, properties = {}, ...children) {
  return fill(document.createElementNS(SVG, tag), properties, children);
}

export function byId(id) {
  const found = document.getElementById(id);
  if (!found) throw new Error(`no element ${id}`);
  return found;
}

export function set(node, attributes) {
  for (const [name, value] of Object.entries(attributes)) {
    if (value === null || value === undefined || value === false) node.removeAttribute(name);
    else if (node.getAttribute(name) !== String(value)) node.setAttribute(name, value === true ? "" : value);
  }
  return node;
}

export function setText(node, text) {
  if (node.textContent !== text) node.textContent = text;
}

function fill(node, properties, children) {
  for (const [name, value] of Object.entries(properties)) {
    if (name === "on") for (const [event, call] of Object.entries(value)) node.addEventListener(event, call);
    else if (name === "data") Object.assign(node.dataset, value);
    else set(node, { [name]: value });
  }
  node.append(...children.filter((child) => child !== null && child !== undefined && child !== false));
  return node;
}

// Tell listeners of changes by name; every part of the page that keeps state is one of these.
export class Teller {
  #listeners = new Map();

  on(name, call) {
    if (!this.#listeners.has(name)) this.#listeners.set(name, []);
    this.#listeners.get(name).push(call);
  }

  tell(name, ...values) {
    for (const call of this.#listeners.get(name) ?? []) call(...values);
  }
}
