// The page put together: parts that know nothing of each other are joined here.

import { get, post, whenGone } from "./api.js";
import { Kept } from "./compare.js";
import { Design } from "./design.js";
import { byId, setText } from "./dom.js";
import { Drawing } from "./drawing.js";
import { Editor } from "./editor.js";
import { Field } from "./field.js";
import { Files } from "./files.js";
import { Findings, spoken } from "./findings.js";
import { Handles } from "./handles.js";
import { Keys } from "./keys.js";
import { Link } from "./link.js";
import { pageKeys } from "./page_keys.js";
import { plain } from "./format.js";
import { Probe } from "./probe.js";
import { Readout } from "./readout.js";
import { StateLine } from "./state_line.js";
import { Studies } from "./studies.js";
import { Tabs } from "./tabs.js";
import { Tasks } from "./tasks.js";
import { theme } from "./theme.js";
import { titleBlock } from "./title_block.js";
import { onBegunElsewhere, onChangedElsewhere, takeToken, tellBegun } from "./token.js";
import { VerdictPanel } from "./verdict_panel.js";
import { Viewport } from "./viewport.js";
import { Work } from "./work.js";

const design = new Design();
const link = new Link();
const work = new Work(link);
const kept = new Kept();
const tasks = new Tasks();
const line = new StateLine();
const stage = byId("stage");
const picture = byId("picture");
const viewport = new Viewport(stage, (event) => handles.take(event));
const drawing = new Drawing(picture, viewport, byId("scale"));
const field = new Field({ canvas: byId("field"), bar: byId("field-bar"), hint: byId("field-hint"), stage }, viewport,
  (shown) => {
    stage.classList.toggle("has-field", shown !== null);
    stage.dataset.field = shown ?? "";
    probe.changed();
  });
const probe = new Probe(stage, viewport, field, say);
const tabs = new Tabs();
const files = new Files(design, tasks, line, tabs, say);
const verdict = new VerdictPanel({ design, work, kept, field, say });
const editor = new Editor((text) => design.edit(text));
const findings = new Findings(goTo);
const ranges = new Map(); // limits of keys, for the text that they were asked of
let rangesText = null;
let rangesEnd = new AbortController(); // gives up what is asked for an earlier text
let chosen = null;

const handles = new Handles(picture, viewport, {
  choose: (handle) => {
    chosen = handle;
    readout.show(handle, handle.value, limits(handle.key));
    askLimits(handle.key);
  },
  limits,
  expect: (key) => askLimits(key),
  preview: (handle, value, began) => {
    readout.show(handle, value, limits(handle.key));
    design.preview({ [handle.key]: value }, began);
  },
  commit,
  revert: () => design.revert(),
});
const readout = new Readout(commit);
const studies = new Studies(tasks, async (picked, what) => {
  await files.take(picked, what);
  tabs.choose("verdict");
}, say);

tabs.on("chosen", (name) => name === "study" && studies.seen());

function limits(key) {
  return rangesText === design.text ? ranges.get(key) : undefined;
}

async function commit(handle, value) {
  const own = limits(handle.key);
  await design.commit({ [handle.key]: value }, `barrier ${handle.barrier}, ${handle.kind} ${plain(value)}`);
  if (!own) return;
  // How far a key may move depends on the others alone: its own limits outlive its change.
  rangesOf(design.text);
  ranges.set(handle.key, own);
  handles.limitsCame();
  if (chosen?.key === handle.key && !handles.isMoving) readout.show(chosen, chosen.value, own);
}

async function askLimits(key) {
  const text = design.text;
  rangesOf(text);
  if (ranges.has(key) || !design.outline?.ok) return;
  ranges.set(key, undefined);
  try {
    const found = await post("/api/ranges", { path: design.path, text, key }, rangesEnd.signal);
    if (rangesText !== text) return;
    ranges.set(key, found);
    handles.limitsCame();
    if (chosen?.key === key && !handles.isMoving) readout.show(chosen, chosen.value, found);
  } catch {
    if (rangesText === text) ranges.delete(key); // asked again with the next change; no limits are shown till then
  }
}

function rangesOf(text) {
  if (rangesText === text) return;
  rangesEnd.abort();
  rangesEnd = new AbortController();
  ranges.clear();
  rangesText = text;
}

function goTo({ key, line: row }) {
  if (row) {
    tabs.choose("text");
    editor.goTo(row);
  } else if (key) {
    handles.focusKey(key);
  }
}

let spokenLast = "";
function say(text) {
  if (text === spokenLast) return;
  spokenLast = text;
  setText(byId("say"), text);
}

design.on("opened", () => {
  chosen = null;
  files.opened();
  verdict.opened();
});
design.on("text", () => {
  editor.show(design.text);
  files.show();
  const [undo, redo] = [byId("undo"), byId("redo")];
  undo.disabled = !design.undoes;
  redo.disabled = !design.redoes;
  undo.title = design.undoes ? `Undo: ${design.undoes} (Ctrl+Z)` : "Nothing to undo (Ctrl+Z)";
  redo.title = design.redoes ? `Redo: ${design.redoes} (Ctrl+Shift+Z)` : "Nothing to redo (Ctrl+Shift+Z)";
});
design.on("outline", (began) => {
  const { outline } = design;
  drawing.show(design.drawing, !outline.drawing);
  if (design.drawing) {
    handles.show(design.drawing.handles ?? [], new Map(outline.keys.map(({ key, value }) => [key, value])));
    chosen = handles.current;
    if (!chosen) readout.rest(handles.count > 0);
    else if (!handles.isMoving) readout.show(chosen, chosen.value, limits(chosen.key), outline.ok);
  }
  findings.show(outline);
  editor.mark(outline.findings);
  titleBlock(byId("title-block"), design);
  verdict.show();
  if (began) measured(began);
});
design.on("settled", () => {
  say(spoken(design.outline));
  if (chosen) askLimits(chosen.key);
  verdict.settled();
});
design.on("fault", (text) => line.set("fault", text, [{ text: "Close", call: () => line.clear("fault") }]));
design.on("elsewhere", () => say("changed in another window"));

// From the hand's move to the changed outline's next frame, for who measures.
function measured(began) {
  requestAnimationFrame(() => {
    const entries = performance.getEntriesByName("redraw");
    if (entries.length > 400) performance.clearMeasures("redraw");
    performance.measure("redraw", { start: began, end: performance.now() });
  });
}

kept.on("changed", () => {
  drawing.compare(kept.value?.drawing);
  byId("keep-drop").hidden = !kept.value;
  titleBlock(byId("title-block"), design, kept.value);
  verdict.show();
});
link.on("state", async (state) => {
  if (state === "gone") line.set("gone", "The server does not answer. What you change is kept in this window; it is tried again all the time.");
  else line.clear("gone");
  if (state === "strange") files.askForAddress(() => link.offered());
  else line.clear("strange");
  if (state === "apart") line.set("apart", "No verdicts for the moment: the server has no place for this window's socket. It is tried again.");
  else line.clear("apart");
  document.body.dataset.link = state;
  if (state !== "on" && state !== "apart") return;
  await start();
});

let hasStarted = false;
async function start() {
  try {
    if (hasStarted) {
      await design.refresh();
    } else {
      const page = await get("/api/page");
      hasStarted = true;
      await files.list(page);
      studies.list(page.studies);
    }
    await tasks.refresh();
  } catch (error) {
    if (error.status) design.tell("fault", error.message);
  }
}

function keep() {
  if (!design.drawing || !design.outline?.ok) return;
  kept.keep(design.outline.name || design.path, design.outline.hash, design.drawing, work.known(design.outline.hash));
  say("kept to compare with");
}

const nextTheme = theme(byId("theme"));
const act = {
  undo: () => { editor.flush(); handles.cancel(); design.undo(); },
  redo: () => { editor.flush(); design.redo(); },
  save: async () => { editor.flush(); await files.save(); },
  saveAs: () => { editor.flush(); files.saveAs(); },
  discard: () => files.discard(),
  release: () => files.release(),
  full: () => verdict.full(),
  stop: () => {
    if (tabs.shown === "study") studies.stop();
    else if (tabs.shown === "release") files.stopRelease();
    else work.stop();
  },
  probe: () => probe.focus(),
  value: () => { handles.focusFirst(); readout.focus(); },
  files: () => { tabs.choose("verdict"); byId("files").querySelector("button")?.focus(); },
  releases: () => (byId("tab-release").hidden ? say("nothing was released since the page was started") : tabs.choose("release", true)),
  study: () => { tabs.choose("study"); byId("study").focus(); },
  points: () => { tabs.choose("study"); studies.focusPoints(); },
  axis: (id) => { tabs.choose("study"); byId(id).focus(); },
  load: () => { tabs.choose("study"); studies.load(); },
  keep,
  drop: () => kept.drop(),
  fit: () => viewport.fit(),
  rotor: () => drawing.fitRotor(),
  larger: () => viewport.zoom(1.3),
  smaller: () => viewport.zoom(1 / 1.3),
  marks: () => handles.focusFirst(),
  findings: () => findings.focusFirst(),
  design: () => byId("design").focus(),
  sheet: () => stage.focus(),
  sweep: () => { tabs.choose("study"); studies.begin(); },
  theme: nextTheme,
  help: () => byId("help").showModal(),
  tab: (name) => tabs.choose(name, true),
  picture: (name) => choosePicture(name),
};

function choosePicture(name) {
  document.querySelector(`input[name=picture][value=${name}]`).checked = true;
  field.choose(name);
}

for (const input of document.querySelectorAll("input[name=picture]")) input.addEventListener("change", () => field.choose(input.value));
for (const [id, call] of Object.entries({
  undo: act.undo, redo: act.redo, save: act.save, "save-as": act.saveAs, discard: act.discard, release: act.release, keep: act.keep,
  "keep-drop": act.drop, "zoom-in": act.larger, "zoom-out": act.smaller, "zoom-fit": act.fit, "zoom-rotor": act.rotor, "full-begin": act.full, "full-stop": () => work.stop(), "help-open": act.help,
})) byId(id).addEventListener("click", call);
stage.addEventListener("keydown", (event) => {
  const way = { ArrowLeft: [-1, 0], ArrowRight: [1, 0], ArrowUp: [0, -1], ArrowDown: [0, 1] }[event.key];
  if (event.target !== stage || !way) return;
  event.preventDefault();
  viewport.pan(...way);
});

pageKeys(new Keys(), act, byId("help-keys"));
kept.tell("changed");
takeToken(() => link.offered());
onChangedElsewhere((path) => {
  if (path === design.path && !handles.isMoving) design.refresh().catch(() => {});
});
work.on("begun", tellBegun);
onBegunElsewhere(() => verdict.look());
document.addEventListener("visibilitychange", () => {
  if (!document.hidden && hasStarted && link.state === "on") design.refresh().catch(() => {});
});
window.addEventListener("beforeunload", (event) => {
  editor.flush();
  if (design.isUnsent) event.preventDefault();
});
whenGone(() => link.suspect());
link.open();
