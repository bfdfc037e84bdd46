// The design that is open: its file, its text, its outline, and every change to them.
//
// The text on the server (a draft, or the file) is the truth that all tabs share: each finished
// change is kept there before anything else. While a mark is dragged, outlines are asked for with
// one request under way at a time and the newest value next, so that none queues.

import { Gone, get, post, Refused } from "./api.js";
import { Teller } from "./dom.js";
import { History } from "./history.js";
import { tellChanged } from "./token.js";

export class Design extends Teller {
  path = null;
  text = "";
  savedText = "";
  sha256 = null;
  outline = null; // the last answer, right or wrong
  drawing = null; // of the last text that had one
  isUnsent = false; // a change that the server has not got yet
  isStale = false; // the file is another now than the one the draft began from
  #history = null;
  #settled = Promise.resolve();
  #turn = 0; // counts texts, so that answers to older ones are dropped
  #live = { wanted: null, isBusy: false };

  get isChanged() {
    return this.path !== null && this.text !== this.savedText;
  }

  get undoes() {
    return this.#history?.undoes ?? null;
  }

  get redoes() {
    return this.#history?.redoes ?? null;
  }

  async open(path) {
    const record = await get("/api/design", { path });
    Object.assign(this, { path, drawing: null, outline: null });
    this.#history = new History(path);
    this.#take(record);
    this.#history.push(this.text, "open");
    this.tell("opened");
    if (this.savedText && this.isChanged) await this.#drawFile();
    await this.check();
  }

  // A draft may be broken: what its file draws is shown till the draft draws something itself.
  async #drawFile() {
    const [path, turn] = [this.path, this.#turn];
    const answer = await post("/api/outline", { path, text: this.savedText });
    if (turn === this.#turn && !this.drawing) this.drawing = answer.drawing;
  }

  // Text that is in no file yet, as of a study's row.
  async begin(path, text, what) {
    Object.assign(this, { path, savedText: "", sha256: null, drawing: null, outline: null, isStale: false });
    this.#history = new History(path);
    this.#history.push(text, what);
    this.text = text;
    this.tell("opened");
    await this.#accept(text, what);
  }

  // What the server has now; other tabs may have changed it.
  async refresh() {
    if (this.path === null) return;
    if (this.isUnsent) {
      await this.#accept(this.text, null);
      return;
    }
    await this.#settled;
    const [path, before] = [this.path, this.text];
    const record = await get("/api/design", { path });
    if (path !== this.path || before !== this.text) return;
    this.#take(record);
    if (this.text !== before) {
      this.#history.push(this.text, "change in another window");
      this.tell("elsewhere");
    }
    await this.check();
  }

  #take(record) {
    const { draft } = record;
    this.savedText = record.text;
    this.text = draft ? draft.text : record.text;
    this.sha256 = draft?.is_stale ? draft.sha256 : record.sha256;
    this.isStale = Boolean(draft?.is_stale);
    this.#turn += 1;
    this.tell("text");
  }

  // While a value moves: show its outline, keep nothing. `began` is when the hand moved.
  preview(changes, began) {
    this.#live.wanted = { changes, began };
    if (!this.#live.isBusy) this.#serveLive();
  }

  async #serveLive() {
    this.#live.isBusy = true;
    await this.#settled;
    while (this.#live.wanted) {
      const { changes, began } = this.#live.wanted;
      this.#live.wanted = null;
      const turn = this.#turn;
      try {
        const answer = await post("/api/outline", { path: this.path, text: this.text, changes });
        if (turn === this.#turn) this.#show(answer, began);
      } catch (error) {
        this.#fail(error);
      }
    }
    this.#live.isBusy = false;
  }

  // The moved values are let go: they are the text from now on.
  commit(changes, what) {
    this.#live.wanted = null;
    return this.#queue(async () => {
      const answer = await post("/api/outline", { path: this.path, text: this.text, changes });
      await this.#accept(answer.text, what, answer);
    });
  }

  edit(text, what = "edit of the text") {
    if (text === this.text) return this.#settled;
    return this.#queue(() => this.#accept(text, what));
  }

  // Back to what the text says: a drag that was given up.
  async revert() {
    this.#live.wanted = null;
    this.#turn += 1;
    await this.check();
  }

  undo() {
    return this.#queue(() => this.#step(this.#history?.undo()));
  }

  redo() {
    return this.#queue(() => this.#step(this.#history?.redo()));
  }

  async #step(text) {
    if (text !== null && text !== undefined) await this.#accept(text, null);
  }

  // Take a text over: here first, then on the server, then its outline with remedies.
  async #accept(text, what, answer = null) {
    this.#turn += 1;
    this.text = text;
    if (what !== null) this.#history.push(text, what);
    this.isUnsent = true;
    this.tell("text");
    if (answer) this.#show(answer, null);
    try {
      await post("/api/draft", { path: this.path, text, sha256: this.sha256 });
      this.isUnsent = false;
      tellChanged(this.path);
    } catch (error) {
      this.#fail(error);
    }
    this.tell("text");
    if (answer?.ok) this.tell("settled");
    else this.check();
  }

  // The outline of the text as it stands; of a broken one also what would fit.
  async check() {
    const turn = ++this.#turn;
    const asked = { path: this.path, text: this.text };
    try {
      const answer = await post("/api/outline", asked);
      if (turn !== this.#turn) return;
      this.#show(answer, null);
      this.tell("settled");
      if (answer.ok) return;
      const told = await post("/api/outline", { ...asked, remedies: true });
      if (turn === this.#turn) this.#show(told, null);
    } catch (error) {
      this.#fail(error);
    }
  }

  #show(answer, began) {
    this.outline = answer;
    if (answer.drawing) this.drawing = answer.drawing;
    this.tell("outline", began);
  }

  async save(path = this.path, isReplacing = false) {
    await this.#settled;
    const sha256 = path === this.path ? this.sha256 : null;
    const saved = await post("/api/save", { path, text: this.text, sha256, replace: isReplacing });
    if (path !== this.path) {
      await this.open(path);
    } else {
      Object.assign(this, { savedText: this.text, sha256: saved.sha256, isStale: false, isUnsent: false });
      this.tell("text");
    }
    tellChanged(path);
  }

  // Drop the draft for what is in the file; one step back undoes it. False where there is no file.
  async discard() {
    await this.#settled;
    await post("/api/discard", { path: this.path });
    if (!this.sha256) return false;
    const record = await get("/api/design", { path: this.path });
    this.#take(record);
    this.#history.push(this.text, "back to the file");
    tellChanged(this.path);
    await this.check();
    return true;
  }

  #queue(work) {
    const done = this.#settled.then(work).catch((error) => this.#fail(error));
    this.#settled = done.catch(() => {}); // a fault of ours is told once and blocks nothing
    return done;
  }

  #fail(error) {
    if (error instanceof Gone) return; // the state line says so
    if (!(error instanceof Refused)) throw error;
    this.tell("fault", error.message);
  }
}
