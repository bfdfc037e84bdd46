// Studies of the folder: start a sweep, watch its ledger fill, pick a design of it.

import { Gone, get, post } from "./api.js";
import { byId, el, set, setText } from "./dom.js";
import { figure, plain } from "./format.js";
import { front, Scatter } from "./scatter.js";
import { isOpen } from "./tasks.js";

const EVERY_MS = 900;
const MOST_ROWS = 60; // in the table; the chart has all

export class Studies {
  #tasks;
  #load;
  #say;
  #choice = byId("study");
  #rows = new Map();
  #study = null;
  #folder = null;
  #chosen = null;
  #timer = 0;
  #looks = 0; // the last of them alone goes on
  #scatter = new Scatter(byId("scatter"), (row) => this.#choose(row.number));

  // `load(path, text, what)`: a design was picked.
  constructor(tasks, load, say) {
    this.#tasks = tasks;
    this.#load = load;
    this.#say = say;
    byId("sweep-begin").addEventListener("click", () => this.begin());
    byId("sweep-stop").addEventListener("click", () => this.stop());
    byId("row-load").addEventListener("click", () => this.load());
    this.#choice.addEventListener("change", () => this.#watch(this.#folderOf(this.#choice.value)));
    for (const id of ["scatter-x", "scatter-y"]) byId(id).addEventListener("change", () => this.#draw());
    tasks.on("changed", () => this.#showTask());
    tasks.on("ended", (task) => {
      if (task.kind !== "sweep") return;
      say(`sweep ${task.state}`);
      if (task.folder === this.#folder) this.#read();
    });
  }

  list(studies) {
    this.#choice.replaceChildren(...studies.map(({ path, name }) => el("option", { value: path }, name ? `${name} (${path})` : path)));
    byId("studies-none").hidden = studies.length > 0;
    byId("studies-some").hidden = studies.length === 0;
  }

  // Its ledger is looked for when the tab is first seen.
  seen() {
    if (this.#choice.value) this.#watch(this.#folderOf(this.#choice.value));
  }

  async begin() {
    const path = this.#choice.value;
    if (!path) return;
    try {
      await this.#tasks.begin("sweep", { path, out: this.#folderOf(path) });
      this.#watch(this.#folderOf(path));
    } catch (error) {
      setText(byId("sweep-line"), error.message);
    }
  }

  async stop() {
    const task = this.#own();
    if (task) await this.#tasks.stop(task.task);
  }

  #folderOf(study) {
    return study.replace(/\.toml$/, "-sweep");
  }

  #own() {
    return this.#tasks.all.findLast((task) => task.kind === "sweep" && (!task.folder || task.folder === this.#folder) && isOpen(task));
  }

  #showTask() {
    const open = this.#own();
    const last = open ?? this.#tasks.all.findLast((task) => task.kind === "sweep" && task.folder === this.#folder);
    byId("sweep-stop").hidden = !open;
    byId("sweep-begin").disabled = Boolean(open);
    byId("sweep-progress").hidden = !open;
    byId("sweep-progress").value = open?.share ?? 0;
    if (last) setText(byId("sweep-line"), [last.state, last.error ?? last.phase].filter(Boolean).join(": "));
  }

  #watch(folder) {
    if (folder !== this.#folder) {
      this.#rows.clear();
      this.#chosen = null;
      this.#study = null;
      setText(byId("sweep-line"), "");
      setText(byId("row-line"), "Choose a point or a number to load its design.");
      set(byId("row-load"), { hidden: true });
    }
    this.#folder = folder;
    clearTimeout(this.#timer);
    this.#read();
  }

  // New rows since the last look, until the sweep has ended and all are here.
  async #read() {
    const folder = this.#folder;
    const look = ++this.#looks;
    let [isMore, isWritten] = [false, false];
    try {
      const answer = await get("/api/ledger", { folder, since: Math.max(0, ...this.#rows.keys()) });
      if (look !== this.#looks) return;
      if (!this.#study && answer.study) this.#begun(answer.study);
      for (const row of answer.rows) this.#rows.set(row.number, row);
      isMore = answer.rows.length > 0 && this.#rows.size < answer.total;
      if (answer.rows.length || !answer.total) this.#draw();
      setText(byId("ledger-line"), answer.total ? `${this.#rows.size}${answer.planned > this.#rows.size ? ` of ${answer.planned}` : ""} designs` : "not swept yet: Sweep computes its designs");
      isWritten = answer.is_written;
    } catch (error) {
      if (!(error instanceof Gone) && look === this.#looks) setText(byId("ledger-line"), error.message);
    }
    if (look !== this.#looks) return; // a later look goes on
    if (isMore || isWritten || this.#own()) this.#timer = setTimeout(() => this.#read(), isMore ? 0 : EVERY_MS);
  }

  #begun(study) {
    this.#study = study;
    const figures = this.#figures();
    ["scatter-x", "scatter-y"].forEach((id, k) => {
      byId(id).replaceChildren(...figures.map((one) => el("option", { value: one.key }, one.label)));
      if (figures.length) byId(id).value = (figures[k] ?? figures[0]).key;
    });
  }

  // Goals first, then what has limits, then the rest that rows hold.
  #figures() {
    const named = new Map();
    const add = (key, sense) => named.has(key) || named.set(key, { key, label: labelOf(key), unit: unitIn(key), sense });
    for (const goal of this.#study?.goals ?? []) add(goal.figure, goal.sense);
    for (const limit of this.#study?.limits ?? []) add(limit.figure, limit.least === null ? "least" : "most");
    for (const row of this.#rows.values()) {
      for (const key of Object.keys(row.figures ?? {})) add(key, "most");
    }
    return [...named.values()];
  }

  #draw() {
    const rows = [...this.#rows.values()];
    const figures = new Map(this.#figures().map((one) => [one.key, one]));
    for (const id of ["scatter-x", "scatter-y"]) {
      const select = byId(id);
      const missing = [...figures.values()].filter(({ key }) => ![...select.options].some((option) => option.value === key));
      select.append(...missing.map((one) => el("option", { value: one.key }, one.label)));
    }
    if (byId("scatter-x").value === byId("scatter-y").value && figures.size > 1) byId("scatter-y").selectedIndex = byId("scatter-x").selectedIndex ? 0 : 1;
    const [x, y] = ["scatter-x", "scatter-y"].map((id) => figures.get(byId(id).value));
    byId("scatter-part").hidden = !(rows.length && x && y);
    for (const part of [byId("row-line").parentElement, byId("ledger").parentElement]) part.hidden = !rows.length;
    if (x && y) this.#scatter.show(rows, x, y, this.#chosen);
    this.#table(rows, x, y);
  }

  #table(rows, x, y) {
    const best = x && y ? front(rows, x, y) : [];
    const isBest = new Set(best.map((row) => row.number));
    const shown = [...best, ...rows.filter((row) => !isBest.has(row.number)).reverse()].slice(0, MOST_ROWS);
    const columns = [x, y].filter(Boolean);
    byId("ledger").replaceChildren(
      el("thead", {}, el("tr", {}, ...["design", ...columns.map(({ label, unit }) => (unit ? `${label}, ${unit}` : label)), "outcome"].map((head) => el("th", { scope: "col" }, head)))),
      el("tbody", {}, ...shown.map((row) => el("tr", { class: row.number === this.#chosen ? "is-chosen" : null },
        el("th", { scope: "row" }, el("button", { type: "button", class: "row", "aria-pressed": String(row.number === this.#chosen), on: { click: () => this.#choose(row.number) } }, String(row.number))),
        ...columns.map(({ key }) => el("td", { class: "number" }, Number.isFinite(row.figures?.[key]) ? figure(row.figures[key], row.errors?.[key]) : "\u2013")),
        el("td", { class: row.passes ? "met" : "missed" }, isBest.has(row.number) ? "\u2713 on the front" : row.passes ? "\u2713 met" : `\u2717 ${row.reason || (row.outcome === "done" ? "misses a limit" : row.outcome)}`)))));
  }

  #choose(number) {
    this.#chosen = number;
    const row = this.#rows.get(number);
    const values = Object.entries(row.values ?? {}).map(([key, value]) => valueText(key, value));
    setText(byId("row-line"), `design ${number}: ${values.join(", ")}`);
    set(byId("row-load"), { hidden: false });
    this.#draw();
    this.#say(`design ${number} chosen`);
  }

  focusPoints() {
    (this.#scatter.isShown ? byId("scatter").querySelector("svg") : byId("sweep-begin")).focus();
  }

  async load() {
    if (this.#chosen === null) return;
    try {
      const picked = await post("/api/pick", { folder: this.#folder, row: this.#chosen, study: this.#choice.value });
      await this.#load(picked, `design ${this.#chosen} of ${this.#folder}`);
    } catch (error) {
      setText(byId("row-line"), error.message);
    }
  }
}

// "rotor.barrier[3].end_angle_deg", 39.5 as "barrier 3 end angle 39.5 deg".
function valueText(key, value) {
  const words = key.replace(/^(rotor|layout)\./, "").replace(/\[(\d+)\]\./, " $1 ").replaceAll(/[._]/g, " ");
  const unit = / (mm|deg|rpm|a|v|percent)$/.exec(words)?.[1];
  const named = unit ? words.slice(0, -unit.length - 1) : words;
  return `${named} ${typeof value === "number" ? plain(value) : value}${unit ? ` ${{ rpm: "1/min", percent: "%", a: "A", v: "V" }[unit] ?? unit}` : ""}`;
}

function labelOf(key) {
  return key.replace(/_(nm|percent|w|mm|kg|rpm|mpa|v|a|t)$/, "").replaceAll("_", " ");
}

function unitIn(key) {
  const ending = /_(nm|percent|w|mm|kg|rpm|mpa|v|a|t)$/.exec(key)?.[1];
  return { nm: "N m", percent: "%", w: "W", mm: "mm", kg: "kg", rpm: "1/min", mpa: "MPa", v: "V", a: "A", t: "T" }[ending] ?? "";
}
