// The sheet's title block: what is drawn, and what is compared with it.

import { el } from "./dom.js";

export function titleBlock(host, design, kept = undefined) {
  if (kept !== undefined) host.kept = kept;
  const { drawing, outline } = design;
  const rows = [];
  if (outline?.name) rows.push(["design", outline.name]);
  if (drawing) {
    const shown = drawing.sector_poles === 1 ? "one pole" : `${drawing.sector_poles} poles`;
    rows.push(["drawn", `${shown} of ${drawing.poles}`]);
  }
  if (host.kept) rows.push(["kept", host.kept.name]);
  const said = JSON.stringify(rows);
  if (host.dataset.says === said) return;
  host.dataset.says = said;
  host.replaceChildren(...rows.map(([name, value]) => el("div", { class: name === "kept" ? "kept-row" : null }, el("dt", {}, name), el("dd", { title: value }, value))));
}
