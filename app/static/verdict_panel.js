// The verdict of the design on the sheet: asked for when its outline has settled, shown with its
// torque, its field and its files; figures of an earlier outline are shown as such till new ones come.

import { getBlob } from "./api.js";
import { byId, el } from "./dom.js";
import { TorqueChart } from "./torque_chart.js";
import { summary, VerdictHead, VerdictView } from "./verdict.js";

export class VerdictPanel {
  #parts;
  #view = new VerdictView();
  #head = new VerdictHead();
  #chart = new TorqueChart(byId("torque"));
  #last = null; // the newest known verdict of this design's file
  #said = null;

  constructor(parts) {
    this.#parts = parts;
    parts.work.on("changed", () => this.show());
  }

  opened() {
    this.#last = null;
    this.show();
  }

  settled() {
    const { design, work } = this.#parts;
    if (design.outline?.ok && !work.fieldJob(design.outline.hash)) work.want("coarse", design.path, design.text);
    this.look();
    this.show();
  }

  // Another window may have had the full verdict computed.
  look() {
    const { design, work } = this.#parts;
    if (design.outline?.ok) work.look(design.outline.hash, design.path, design.text);
  }

  full() {
    const { design, work } = this.#parts;
    if (design.outline?.ok) work.want("full", design.path, design.text);
  }

  show() {
    const { design, work, kept, field, say } = this.#parts;
    const hash = design.outline?.hash ?? null;
    const isBroken = Boolean(design.outline && !design.outline.ok);
    const own = hash && !isBroken ? work.known(hash) : null;
    if (own) this.#last = own;
    const known = this.#last;
    const isOld = known !== own;
    kept.fill(own);
    const other = kept.value?.result ? { name: "kept", job: kept.value.job, result: kept.value.result } : null;
    this.#view.show(known, other, isOld);
    this.#head.show({ known, isOld, coarse: work.of("coarse"), full: work.of("full"), isBroken });
    byId("torque-part").hidden = !known?.result.torque?.torque_nm?.length;
    this.#chart.show(known?.result.torque, other?.result.torque);
    byId("torque").classList.toggle("is-old", isOld);
    this.#files(own);
    const fieldJob = known && work.fieldJob(known.result.design_hash);
    field.want(fieldJob, isOld ? "of an earlier outline" : "");
    if (own && own.job !== this.#said) {
      this.#said = own.job;
      say(`${own.effort} verdict: ${summary(own)}`);
    }
  }

  #files(known) {
    const names = known?.result.files ?? [];
    byId("files-part").hidden = !names.length;
    const key = `${known?.job} ${names.length}`;
    if (byId("files").dataset.of === key) return;
    byId("files").dataset.of = key;
    byId("files").replaceChildren(...names.map((name) => el("li", {}, el("button", { type: "button", class: "file", on: { click: () => download(known.job, name) } }, name))));
  }
}

// Files need the token, which a plain link would not send.
async function download(job, name) {
  const address = URL.createObjectURL(await getBlob(`/api/jobs/${encodeURIComponent(job)}/file/${encodeURIComponent(name)}`));
  el("a", { href: address, download: name }).click();
  setTimeout(() => URL.revokeObjectURL(address), 10_000);
}
