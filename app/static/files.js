// Design files: which one is open, saving, going back, releasing, and the dialogs that go with it.

import { byId, el, set, setText } from "./dom.js";
import { get } from "./api.js";
import { ask } from "./dialogs.js";
import { isOpen } from "./tasks.js";
import { giveToken } from "./token.js";

export class Files {
  #design;
  #tasks;
  #line;
  #tabs;
  #say;
  #choice = byId("design");

  constructor(design, tasks, line, tabs, say) {
    this.#design = design;
    this.#tasks = tasks;
    this.#line = line;
    this.#tabs = tabs;
    this.#say = say;
    this.#choice.addEventListener("change", () => this.#open(this.#choice.value));
    tasks.on("changed", () => this.#releases());
    tasks.on("ended", (task) => task.kind === "release" && say(task.state === "done" ? `released as package ${task.result.number}` : `not released: ${task.error ?? task.state}`));
  }

  async list({ designs, start }) {
    this.#choice.replaceChildren(...designs.map(({ path, name }) => option(path, name)));
    const last = sessionStorage.getItem("lamwright-open");
    const path = [last, start, designs[0]?.path].find((one) => one && (one === start || designs.some((each) => each.path === one)));
    if (path) await this.#open(path);
    else this.#line.set("fault", "No design file in this folder: begin one by lamwright start, then reload this page.");
  }

  opened() {
    const { path } = this.#design;
    if (![...this.#choice.options].some((one) => one.value === path)) this.#choice.append(option(path, ""));
    this.#choice.value = path;
    sessionStorage.setItem("lamwright-open", path);
    this.#line.clear("fault");
    this.show();
  }

  // Saved, or a draft, or one that began from another file than there is now.
  show() {
    const { isChanged, isStale, sha256, path } = this.#design;
    const state = byId("file-state");
    setText(state, isChanged ? (sha256 ? "draft, not saved" : "new, not saved") : "saved");
    set(state, { "data-changed": String(isChanged) });
    byId("save").disabled = !isChanged;
    byId("discard").disabled = !isChanged;
    document.title = `${isChanged ? "\u2022 " : ""}${path ?? ""} \u2013 Lamwright`;
    if (isStale) {
      this.#line.set("stale", "The file has changed on the disk since this draft began.", [
        { text: "Back to the file", call: () => this.discard() },
        { text: "Save over it", call: () => this.#save(path, true) },
        { text: "Save as \u2026", call: () => this.saveAs() }]);
    } else {
      this.#line.clear("stale");
    }
  }

  async save() {
    const { path, isChanged, sha256 } = this.#design;
    if (!isChanged) return;
    if (sha256) await this.#save(path, false);
    else await this.saveAs();
  }

  // What the server would refuse is asked before it is tried, and told in the dialog.
  async saveAs() {
    const { path, sha256 } = this.#design;
    let [named, there] = [path, null];
    const answer = await ask("Save under a name", {
      fields: [{ name: "path", label: "File, in the page's folder", value: sha256 ? path.replace(/(-\d+)?\.toml$/, "-2.toml") : path }],
      buttons: [{ value: "save", text: "Save" }],
      attempt: async (given) => {
        named = given.path.endsWith(".toml") ? given.path : `${given.path}.toml`;
        const { fault, exists } = await get("/api/name", { path: named, use: "design" });
        there = exists && (named !== path || !sha256) ? `${named} is there already.` : null;
        if (fault || there) return fault;
        there = await this.#tried(named, false);
        return null;
      },
    });
    if (answer && there) await this.#overwrite(named, there);
  }

  async #save(path, isReplacing) {
    try {
      const there = await this.#tried(path, isReplacing);
      if (there) await this.#overwrite(path, there);
    } catch (error) {
      this.#fault(error);
    }
  }

  // Null once it is saved, else what is said of another file that is there.
  async #tried(path, isReplacing) {
    try {
      await this.#design.save(path, isReplacing);
    } catch (error) {
      if (error.status === 409) return error.message;
      throw error;
    }
    this.#line.clear("fault");
    this.#say(`saved as ${path}`);
    return null;
  }

  async #overwrite(path, there) {
    const answer = await ask("Another file is there", {
      lines: [there], buttons: [{ value: "as", text: "Save as \u2026", isMain: true }, { value: "replace", text: "Replace it" }],
    });
    if (answer?.button === "replace") await this.#save(path, true);
    if (answer?.button === "as") await this.saveAs();
  }

  async discard() {
    const { isChanged, sha256, path } = this.#design;
    if (!isChanged) return;
    if (!sha256) {
      const answer = await ask("Drop this design?", { lines: [`${path} was never saved: nothing of it is left then.`], buttons: [{ value: "drop", text: "Drop it" }] });
      if (!answer) return;
    }
    try {
      if (await this.#design.discard()) {
        this.#say("back to the file; undo brings the draft again");
      } else {
        [...this.#choice.options].find((one) => one.value === path)?.remove();
        if (this.#choice.options.length) await this.#open(this.#choice.options[0].value);
        this.#say(`${path} dropped`);
      }
    } catch (error) {
      this.#fault(error);
    }
  }

  async release() {
    const { path, isChanged } = this.#design;
    if (isChanged) {
      const answer = await ask("Release needs a saved design", { lines: [`${path} has changes that are not saved.`], buttons: [{ value: "save", text: "Save it" }] });
      if (!answer) return;
      await this.save();
      if (this.#design.isChanged) return;
    }
    await ask("Release for manufacture", {
      lines: ["Computes the full verdict, unless it is known, and writes drawings, outlines and solids of the saved design into a folder; an earlier package there is replaced.", "Rotors can burst: have a competent person check it before anything is built."],
      fields: [{ name: "out", label: "Folder for it, in the page's folder", value: this.#design.path.replace(/\.toml$/, "-release") },
        { name: "despite", label: "even if limits are missed", type: "checkbox" }],
      buttons: [{ value: "release", text: "Release" }],
      attempt: async ({ out, despite }) => {
        const { fault } = await get("/api/name", { path: out, use: "folder" });
        if (fault) return fault;
        await this.#tasks.begin("release", { path: this.#design.path, out, despite_limits: despite });
        this.#tabs.choose("release");
        return null;
      },
    });
  }

  // A design of a study: it becomes a new file when it is saved.
  async take(picked, what) {
    if (this.#design.isUnsent) return;
    await this.#design.begin(picked.path, picked.text, what);
  }

  askForAddress(open) {
    this.#line.set("strange", "The server was started anew, with another address. Open the address that it printed, or paste it here.", [{ text: "Paste the address", call: async () => {
      const answer = await ask("The address that the server printed", {
        fields: [{ name: "address", label: "http://127.0.0.1:\u2026/#token=\u2026" }],
        buttons: [{ value: "go", text: "Connect" }],
        attempt: ({ address }) => giveToken(address),
      });
      if (answer) open();
    } }]);
  }

  async #open(path) {
    try {
      await this.#design.open(path);
    } catch (error) {
      this.#choice.value = this.#design.path;
      this.#fault(error);
    }
  }

  async stopRelease() {
    const task = this.#tasks.all.findLast((one) => one.kind === "release" && isOpen(one));
    if (task) await this.#tasks.stop(task.task);
  }

  // The newest first.
  #releases() {
    const own = this.#tasks.all.filter((task) => task.kind === "release").reverse();
    byId("tab-release").hidden = !own.length;
    const key = JSON.stringify(own);
    if (byId("releases").dataset.of === key) return;
    byId("releases").dataset.of = key;
    byId("releases").replaceChildren(...own.map((task) => this.#release(task)));
  }

  #release(task) {
    const { folder, state, phase, share, error, result } = task;
    const head = (sign, kind, text) => el("p", { class: kind }, sign && el("span", { class: "sign", "aria-hidden": "true" }, `${sign} `), el("strong", {}, folder), ` ${text}`);
    if (isOpen(task)) {
      return el("li", {}, head(null, null, phase ? `under way: ${phase}` : "is about to begin"),
        el("p", { class: "study-row" }, el("progress", { max: 1, value: share ?? 0, "aria-label": `Release to ${folder}` }), el("button", { type: "button", title: "Stop the release (X)", on: { click: () => this.#tasks.stop(task.task) } }, "Stop")));
    }
    if (state !== "done") {
      return el("li", {}, head("\u2717", "missed", state === "stopped" ? "was stopped: nothing was released" : "was not released"),
        error && el("p", {}, error));
    }
    return el("li", {}, head("\u2713", "met", `released as package ${result.number}`),
      result.passes ? null : el("p", { class: "missed" }, "Limits are missed: every sheet of it is marked NOT PASSED."),
      el("p", {}, `In ${result.place}`),
      el("details", {}, el("summary", {}, `${result.files.length + 1} files`), el("ul", { class: "file-names" }, ...result.files.map((name) => el("li", {}, name)), el("li", {}, "the manifest, which lists them with their checksums"))));
  }

  #fault(error) {
    if (error.status) this.#line.set("fault", error.message, [{ text: "Close", call: () => this.#line.clear("fault") }]);
  }
}

function option(path, name) {
  return el("option", { value: path }, name ? `${name} \u00b7 ${path}` : path);
}
