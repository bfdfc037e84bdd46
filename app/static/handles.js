// Marks on the drawing that a key's value is moved by: by pointer, touch and keys.
//
// A press takes the nearest mark within reach, not the topmost: ribs and barrier ends lie close.
// Each mark is a slider for a screen reader. Pointer: let go to accept. Keys: arrows step, Shift
// makes steps fine, Page keys make them ten times as large, Home and End go to the limits; a row of
// steps is one change, accepted by Enter, by leaving the mark or after a pause. Escape gives it up.

import { set, svg } from "./dom.js";
import { decimalsOf, plain } from "./format.js";

const REACH = { mouse: 14, pen: 18, touch: 30 }; // px
const PAUSE_MS = 900;
const REST_MS = 60;
const FINE = 0.1;

export class Handles {
  chosen = null; // the id of the mark that the page tells of
  #group = svg("g", { class: "handles" });
  #travel = svg("g", { class: "travel", "aria-hidden": "true" });
  #viewport;
  #desk; // preview(key, value, began), commit(key, value), revert(), limits(key), expect(key), choose(handle)
  #handles = [];
  #nodes = new Map();
  #hovered = { key: null, timer: null };
  #move = null; // what is being moved: {handle, from, value, pointer, press, limits, timer}
  #accepted = null; // {key, value} that was let go and that the text does not say yet

  constructor(picture, viewport, desk) {
    this.#viewport = viewport;
    this.#desk = desk;
    picture.append(this.#travel, this.#group);
    viewport.on("moved", () => this.#place());
    const stage = picture.parentElement;
    stage.addEventListener("pointermove", (event) => this.#pointerMoved(event));
    stage.addEventListener("pointerup", (event) => this.#pointerUp(event));
    stage.addEventListener("pointercancel", (event) => this.#pointerUp(event, false));
  }

  get count() {
    return this.#handles.length;
  }

  get isMoving() {
    return this.#move !== null;
  }

  // `values`: what the text says by key; where the drawing is of an earlier text, marks stand there.
  show(handles, values) {
    this.#handles = handles.map((handle) => {
      const value = values.get(handle.key);
      if (value === undefined || value === handle.value) return handle;
      return { ...handle, ...reached(handle, (value - handle.value) / handle.per_mm), value };
    });
    const ids = new Set(this.#handles.map((handle) => handle.id));
    for (const [id, node] of this.#nodes) {
      if (!ids.has(id)) {
        node.remove();
        this.#nodes.delete(id);
      }
    }
    for (const handle of this.#handles) {
      if (!this.#nodes.has(handle.id)) this.#nodes.set(handle.id, this.#made(handle));
      const isOwn = this.#move?.handle.key === handle.key;
      this.#describe(handle, isOwn ? this.#move.value : handle.value);
    }
    this.#place();
  }

  // The mark that was chosen last, the first one at the beginning.
  focusFirst() {
    const handle = this.#handles.find((one) => one.id === this.chosen) ?? this.#handles[0];
    if (handle) this.#nodes.get(handle.id).focus();
  }

  focusKey(key) {
    const handle = this.#handles.find((one) => one.key === key);
    if (handle) this.#nodes.get(handle.id).focus();
  }

  take(event) {
    if (this.#move) this.#accept();
    const at = this.#viewport.place(event);
    const handle = this.#nearest(at, REACH[event.pointerType] ?? REACH.mouse);
    if (!handle) return false;
    event.preventDefault();
    this.#nodes.get(handle.id).focus({ preventScroll: true });
    this.#begin(handle);
    Object.assign(this.#move, { pointer: event.pointerId, press: this.#viewport.toDrawing(at.x, at.y) });
    event.currentTarget.setPointerCapture(event.pointerId);
    return true;
  }

  // Give up what is moved; true if something was.
  cancel() {
    if (!this.#move) return false;
    this.#end();
    this.#desk.revert();
    return true;
  }

  #nearest(at, reach) {
    let [best, least] = [null, reach];
    for (const handle of this.#handles) {
      const place = this.#viewport.toStage(handle.x, handle.y);
      const gap = Math.hypot(place.x - at.x, place.y - at.y) - (handle.id === this.chosen ? 2 : 0);
      if (gap < least) [best, least] = [handle, gap];
    }
    return best;
  }

  #made(handle) {
    const node = svg("g", { class: `handle k-${handle.kind.replaceAll(" ", "-")}`, tabindex: 0, role: "slider", "data-id": handle.id },
      svg("path", { class: "halo", d: "M-9 0 A9 9 0 0 0 9 0 A9 9 0 0 0 -9 0 Z" }),
      svg("path", { class: "arrows", d: "M9.5 0 L15 0 M12 -3 L15 0 L12 3 M-9.5 0 L-15 0 M-12 -3 L-15 0 L-12 3" }),
      svg("path", { class: "mark", d: MARKS[handle.kind] ?? MARKS.depth }));
    node.addEventListener("focus", () => {
      this.chosen = handle.id;
      this.#desk.choose(this.#current(handle.id));
      this.#drawTravel();
    });
    node.addEventListener("blur", () => {
      if (this.#move && this.#move.pointer === undefined) this.#accept();
      this.#travel.replaceChildren();
    });
    node.addEventListener("keydown", (event) => this.#key(event, handle.id));
    this.#group.append(node);
    return node;
  }

  get current() {
    return this.#current(this.chosen) ?? null;
  }

  #current(id) {
    return this.#handles.find((handle) => handle.id === id);
  }

  #describe(handle, value) {
    const limits = this.#desk.limits(handle.key);
    set(this.#nodes.get(handle.id), {
      "aria-label": `barrier ${handle.barrier}, ${handle.kind}${handle.number > 1 ? ` ${handle.number}` : ""}${handle.side === "middle" ? "" : `, ${handle.side}`}`,
      "aria-valuenow": plain(value),
      "aria-valuetext": `${plain(value)} ${handle.unit === "deg" ? "degrees" : handle.unit}`,
      "aria-valuemin": limits ? plain(limits.least.value) : null,
      "aria-valuemax": limits ? plain(limits.most.value) : null,
    });
  }

  #place() {
    const size = 1 / this.#viewport.scale;
    for (const handle of this.#handles) {
      const angle = (Math.atan2(handle.dy, handle.dx) * 180) / Math.PI;
      set(this.#nodes.get(handle.id), { transform: `translate(${handle.x} ${handle.y}) rotate(${angle}) scale(${size})` });
    }
    this.#drawTravel();
  }

  #begin(handle) {
    const value = this.#accepted?.key === handle.key ? this.#accepted.value : handle.value;
    this.#move = { handle, from: value, value };
    this.#nodes.get(handle.id).classList.add("is-moving");
    this.#desk.choose(handle);
  }

  #end() {
    const move = this.#move;
    clearTimeout(move.timer);
    this.#nodes.get(move.handle.id)?.classList.remove("is-moving");
    this.#move = null;
    return move;
  }

  #accept() {
    const { handle, from, value } = this.#end();
    if (value === from) {
      this.#desk.revert();
      return;
    }
    const accepted = { key: handle.key, value };
    this.#accepted = accepted;
    this.#desk.commit(handle, value).finally(() => {
      if (this.#accepted === accepted) this.#accepted = null;
    });
  }

  #to(value, step, began) {
    const move = this.#move;
    const next = this.#within(move.handle.key, round(value, step), step);
    if (next === move.value) return;
    move.value = next;
    this.#desk.preview(move.handle, next, began);
    this.#describe(move.handle, next);
  }

  #within(key, value, step) {
    const limits = this.#desk.limits(key);
    if (!limits) return Math.max(value, 0);
    // Limits themselves are rounded inward, so that what is written is accepted.
    const fine = step * FINE;
    const least = Math.ceil(limits.least.value / fine - 1e-6) * fine;
    const most = Math.floor(limits.most.value / fine + 1e-6) * fine;
    return round(Math.min(most, Math.max(least, value)), fine);
  }

  #pointerMoved(event) {
    const move = this.#move;
    const at = this.#viewport.place(event);
    if (!move && event.buttons === 0) this.#hover(at, event.pointerType);
    if (!move || move.pointer !== event.pointerId) return;
    const { handle, press } = move;
    const now = this.#viewport.toDrawing(at.x, at.y);
    let along = (now.x - press.x) * handle.dx + (now.y - press.y) * handle.dy;
    if (handle.unit === "deg") along = turned(handle, press, now);
    this.#to(move.from + along * handle.per_mm, handle.step * (event.shiftKey ? FINE : 1), event.timeStamp);
  }

  // Limits take a moment: they are asked for when a pointer rests on a mark, before it is pressed.
  #hover(at, kind) {
    const key = this.#nearest(at, REACH[kind] ?? REACH.mouse)?.key ?? null;
    if (key === this.#hovered.key) return;
    clearTimeout(this.#hovered.timer);
    this.#hovered = { key, timer: key && setTimeout(() => this.#desk.expect(key), REST_MS) };
  }

  #pointerUp(event, isAccepted = true) {
    if (!this.#move || this.#move.pointer !== event.pointerId) return;
    if (isAccepted) this.#accept();
    else this.cancel();
  }

  #key(event, id) {
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    const handle = this.#current(id);
    const step = handle.step * (event.shiftKey ? FINE : 1);
    const steps = { ArrowUp: 1, ArrowRight: 1, ArrowDown: -1, ArrowLeft: -1, PageUp: 10, PageDown: -10 }[event.key];
    const limits = this.#desk.limits(handle.key);
    const goal = { Home: limits?.least.value, End: limits?.most.value }[event.key];
    if (event.key === "Escape" || event.key === "Enter") {
      if (!this.#move) return;
      if (event.key === "Enter") this.#accept();
      else this.cancel();
    } else if (steps !== undefined || goal !== undefined) {
      if (!this.#move) this.#begin(handle);
      this.#to(goal ?? this.#move.value + steps * step, step, event.timeStamp);
      clearTimeout(this.#move.timer);
      this.#move.timer = setTimeout(() => this.#accept(), PAUSE_MS);
    } else {
      return;
    }
    event.preventDefault();
    event.stopPropagation();
  }

  limitsCame() {
    for (const handle of this.#handles) {
      this.#describe(handle, this.#move?.handle.key === handle.key ? this.#move.value : handle.value);
    }
    this.#drawTravel();
  }

  // The way that the chosen mark may go, with a bar at either limit.
  #drawTravel() {
    const handle = this.#handles.find((one) => one.id === this.chosen);
    const limits = handle && this.#desk.limits(handle.key);
    if (!limits || document.activeElement !== this.#nodes.get(handle.id)) {
      this.#travel.replaceChildren();
      return;
    }
    const value = this.#move?.handle.key === handle.key ? this.#move.value : handle.value;
    const ends = [limits.least.value, limits.most.value].map((one) => reached(handle, (one - value) / handle.per_mm));
    const half = 6 / this.#viewport.scale;
    const bars = ends.map(({ x, y, dx, dy }) => `M${x - half * dy} ${y + half * dx} L${x + half * dy} ${y - half * dx}`);
    const radius = Math.hypot(handle.x, handle.y);
    const [a, b] = ends;
    const sweep = handle.x * handle.dy - handle.y * handle.dx > 0 ? 1 : 0;
    const way = handle.unit === "deg" ? `A${radius} ${radius} 0 0 ${sweep} ${b.x} ${b.y}` : `L${b.x} ${b.y}`;
    this.#travel.replaceChildren(svg("path", { d: `M${a.x} ${a.y} ${way}` }), svg("path", { class: "limit", d: bars.join(" ") }));
  }
}

// Marks tell kinds apart by form, not by colour: square, lozenge, round, bars.
const MARKS = {
  "end angle": "M-5 0 A5 5 0 0 0 5 0 A5 5 0 0 0 -5 0 Z",
  depth: "M-4.5 -4.5 H4.5 V4.5 H-4.5 Z",
  thickness: "M-6 0 L0 -6 L6 0 L0 6 Z",
  "tangential rib": "M-4 -5.5 L5 0 L-4 5.5 Z",
  "radial rib": "M-4 -5.5 L5 0 L-4 5.5 Z",
};

function round(value, step) {
  return Number((Math.round(value / step) * step).toFixed(decimalsOf(step)));
}

// mm along the circle round the shaft, from where it was pressed.
function turned(handle, press, now) {
  const angle = Math.atan2(press.x * now.y - press.y * now.x, press.x * now.x + press.y * now.y);
  const sense = Math.sign(handle.x * handle.dy - handle.y * handle.dx);
  return sense * angle * Math.hypot(handle.x, handle.y);
}

// Place and direction of a mark after `along` mm.
function reached(handle, along) {
  if (handle.unit !== "deg") {
    return { x: handle.x + along * handle.dx, y: handle.y + along * handle.dy, dx: handle.dx, dy: handle.dy };
  }
  const sense = Math.sign(handle.x * handle.dy - handle.y * handle.dx);
  const angle = (sense * along) / Math.hypot(handle.x, handle.y);
  const [cos, sin] = [Math.cos(angle), Math.sin(angle)];
  const turn = (x, y) => [x * cos - y * sin, x * sin + y * cos];
  const [x, y] = turn(handle.x, handle.y);
  const [dx, dy] = turn(handle.dx, handle.dy);
  return { x, y, dx, dy };
}
