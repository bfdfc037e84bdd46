// Questions in a dialog: each answers by a promise, null when it is left.

import { byId, el, setText } from "./dom.js";

// fields: [{name, label, value?, type?}]; buttons: [{value, text, isMain?}].
export function ask(title, { lines = [], fields = [], buttons }) {
  const dialog = byId("question");
  const inputs = fields.map((field) => [field.name, el("input", { id: `q-${field.name}`, type: field.type ?? "text", value: field.value ?? "", autocomplete: "off", spellcheck: "false" })]);
  setText(byId("question-title"), title);
  return new Promise((resolve) => {
    let answer = null;
    const done = (button) => {
      answer = { button: button.value, ...Object.fromEntries(inputs.map(([name, input]) => [name, input.type === "checkbox" ? input.checked : input.value.trim()])) };
      dialog.close();
    };
    const main = buttons.find((button) => button.isMain) ?? buttons[0];
    const form = el("form", { method: "dialog", on: { submit: (event) => {
      event.preventDefault();
      done(buttons.find((button) => button.value === event.submitter?.value) ?? main);
    } } },
      ...lines.map((line) => el("p", {}, line)),
      ...fields.map((field, k) => el("p", { class: "field" }, el("label", { for: `q-${field.name}` }, field.label), inputs[k][1])),
      el("p", { class: "buttons" }, el("button", { type: "button", on: { click: () => dialog.close() } }, "Cancel"),
        ...buttons.map((button) => el("button", { type: "submit", value: button.value, class: button === main ? "main" : null }, button.text))));
    byId("question-body").replaceChildren(form);
    dialog.addEventListener("close", () => resolve(answer), { once: true });
    dialog.showModal();
    (inputs[0]?.[1] ?? form.querySelector("button.main")).focus();
    inputs[0]?.[1].select?.();
  });
}
