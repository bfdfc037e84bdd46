// Figures and limits of the design on the sheet, with error bars; the kept design's beside them.
// A limit that is missed shows by a sign and a word as well as by colour.

import { byId, el, set, setText } from "./dom.js";
import { gauge, isOpen } from "./gauge.js";
import { figure, plain, signed, unitOf, written } from "./format.js";

const SENSES = { least: "\u2265", most: "\u2264" };

export class VerdictView {
  #limits = byId("limits");
  #figures = byId("figures");
  #shownJob = null;

  // `known`: {job, effort, result} or null; `isOld`: of another design than the one on the sheet.
  show(known, kept, isOld) {
    const key = `${known?.job} ${kept?.job} ${isOld}`;
    if (key === this.#shownJob) return;
    this.#shownJob = key;
    for (const host of [this.#limits, this.#figures]) host.classList.toggle("is-old", isOld);
    if (!known) {
      this.#limits.replaceChildren(el("p", { class: "quiet" }, "No figures yet."));
      this.#figures.replaceChildren();
      return;
    }
    const { result } = known;
    const other = new Map((kept?.result.figures ?? []).map((one) => [one.key, one]));
    this.#limits.replaceChildren(result.outcomes.length ? limitsTable(result, other, kept) : el("p", { class: "quiet" }, "The design file states no limits."));
    this.#figures.replaceChildren(...[cautions(result), ...figureTables(result, other, kept), ribsTable(result)].filter(Boolean));
  }
}

function cautions({ cautions: lines }) {
  if (!lines?.length) return null;
  return el("section", { class: "cautions" }, el("h3", {}, "Cautions"), el("ul", {}, ...lines.map((line) => el("li", {}, line))));
}

function limitsTable(result, other, kept) {
  const named = new Map(result.figures.map((one) => [one.key, one]));
  const rows = result.outcomes.map((outcome) => {
    const label = outcome.label ?? named.get(outcome.figure)?.label ?? outcome.figure;
    return el("tr", { class: outcome.passes ? "met" : "missed" },
      el("th", { scope: "row" }, label),
      el("td", { class: "number" }, `${figure(outcome.value, outcome.error)} ${unitOf(outcome.unit)}`),
      kept && el("td", { class: "number kept-value" }, other.has(outcome.figure) ? difference(outcome.value, other.get(outcome.figure).value) : ""),
      el("td", { class: "gauge-cell" }, gauge(outcome)),
      el("td", { class: "number limit" }, `${SENSES[outcome.sense]} ${plain(outcome.limit)}`),
      el("td", { class: "outcome" }, el("span", { class: "sign", "aria-hidden": "true" }, outcome.passes ? "\u2713" : "\u2717"), outcome.passes ? " met" : " missed", isOpen(outcome) && el("span", { class: "estimate" }, " within its error")));
  });
  return table("Limits", ["figure", "value", kept && `against ${kept.name}`, "", "limit", "outcome"], rows, "limits");
}

function figureTables(result, other, kept) {
  const groups = Map.groupBy ? Map.groupBy(result.figures, (one) => one.group) : grouped(result.figures);
  return [...groups].map(([group, figures]) => {
    const rows = figures.map((one) => el("tr", {},
      el("th", { scope: "row" }, one.label, one.estimate && el("span", { class: "estimate", title: "an estimate: no error bar is known" }, " est.")),
      el("td", { class: "number" }, `${figure(one.value, one.error)} ${unitOf(one.unit)}`),
      kept && el("td", { class: "number kept-value" }, other.has(one.key) ? difference(one.value, other.get(one.key).value) : "")));
    return table(group, ["figure", "value", kept && `against ${kept.name}`], rows, "plain");
  });
}

function ribsTable({ ribs }) {
  if (!ribs?.length) return null;
  const rows = ribs.map((rib) => el("tr", {}, el("th", { scope: "row" }, rib.name.replaceAll("_", " ")),
    el("td", { class: "number" }, `${plain(rib.width_mm)} mm`),
    el("td", { class: "number" }, `${figure(rib.peak_mpa, rib.peak_mpa_error)} MPa`),
    el("td", { class: "number" }, figure(rib.yield_margin))));
  return table("ribs at overspeed", ["rib", "width", "peak stress", "yield margin"], rows, "ribs");
}

function table(caption, heads, rows, kind) {
  return el("table", { class: `figures ${kind}` }, el("caption", {}, caption),
    el("thead", { class: kind === "plain" ? "unseen" : null }, el("tr", {}, ...heads.filter((head) => head !== undefined && head !== null).map((head) => (head ? el("th", { scope: "col" }, head) : el("td"))))),
    el("tbody", {}, ...rows));
}

function grouped(figures) {
  const groups = new Map();
  for (const one of figures) groups.set(one.group, [...(groups.get(one.group) ?? []), one]);
  return groups;
}

function difference(value, kept) {
  if (!Number.isFinite(value) || !Number.isFinite(kept)) return "";
  const by = value - kept;
  if (Math.abs(by) <= 1e-9 * Math.abs(kept)) return "same";
  return kept ? `${signed((100 * by) / Math.abs(kept), 2)} %` : signed(by);
}

// What the verdict is, in one line; also said to screen readers.
export function summary(known) {
  if (!known) return "";
  const { outcomes, figures } = known.result;
  const missed = outcomes.filter((one) => !one.passes);
  const named = new Map(figures.map((one) => [one.key, one.label]));
  if (!outcomes.length) return "no limits stated";
  if (!missed.length) return `all ${outcomes.length} limits met`;
  return `${missed.length} of ${outcomes.length} limits missed: ${missed.map((one) => named.get(one.figure) ?? one.figure).join(", ")}`;
}

// The line above the figures: which verdict this is, what is under way.
export class VerdictHead {
  #line = byId("verdict-line");
  #seal = byId("verdict-seal");
  #bar = byId("full-progress");
  #stop = byId("full-stop");
  #begin = byId("full-begin");
  #phase = byId("full-phase");

  show({ known, isOld, coarse, full, isBroken }) {
    const fine = known && !isOld && known.effort === "full";
    const seconds = known ? ` in ${written(known.result.seconds, 2)} s` : "";
    let line = known ? `${fine ? "Full" : "Coarse"} verdict${seconds}` : "No verdict yet";
    if (isOld) line = "Figures of an earlier outline";
    if (isBroken) line += "; this one cannot be built";
    else if (isUnderWay(coarse) && (!known || isOld)) line += known ? "; new ones come" : ": it comes";
    else if (coarse?.state === "failed") line += `; coarse verdict failed: ${coarse.error}`;
    setText(this.#line, line);
    const passes = known && !isOld && known.result.outcomes.length ? known.result.passes : null;
    set(this.#seal, { "data-passes": passes === null ? "none" : String(passes) });
    setText(this.#seal, passes === null ? (known && !isOld ? "no limits" : "\u2013") : passes ? "\u2713 all limits met" : `\u2717 ${known.result.outcomes.filter((one) => !one.passes).length} missed`);
    const runs = isUnderWay(full);
    this.#bar.hidden = !runs;
    this.#stop.hidden = !runs;
    this.#begin.disabled = runs || isBroken || fine;
    this.#bar.value = full?.share ?? 0;
    setText(this.#phase, runs ? full.phase || "full verdict waits" : { failed: `full verdict failed: ${full?.error}`, stopped: "full verdict stopped" }[full?.state] ?? "");
  }
}

function isUnderWay(job) {
  return ["asked", "waiting", "running"].includes(job?.state);
}
