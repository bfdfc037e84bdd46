// Questions in a dialog: each answers by a promise, null when it is left.

import { Gone, Refused } from "./api.js";
import { byId, el, set, setText } from "./dom.js";

// fields: [{name, label, value?, type?}]; buttons: [{value, text, isMain?}].
// `attempt(answer)` does what was asked for while the dialog is open, or looks whether it can be
// done: a line that it gives says why not, stands in the dialog, and the question stays.
export function ask(title, { lines = [], fields = [], buttons, attempt = null }) {
  const dialog = byId("question");
  const inputs = fields.map((field) => [field.name, el("input", { id: `q-${field.name}`, type: field.type ?? "text", value: field.value ?? "", autocomplete: "off", spellcheck: "false" })]);
  setText(byId("question-title"), title);
  return new Promise((resolve) => {
    let [answer, isBusy] = [null, false];
    const fault = el("p", { class: "missed fault", id: "q-fault", role: "alert" });
    const refuse = (line) => {
      setText(fault, line ? `\u2717 ${line}` : "");
      if (!inputs.length) return;
      set(inputs[0][1], { "aria-invalid": line ? "true" : null, "aria-describedby": line ? "q-fault" : null });
      if (line) inputs[0][1].focus();
    };
    const done = async (button) => {
      if (isBusy) return;
      const given = { button: button.value, ...Object.fromEntries(inputs.map(([name, input]) => [name, input.type === "checkbox" ? input.checked : input.value.trim()])) };
      isBusy = true;
      let line = null;
      try {
        line = await attempt?.(given);
      } catch (error) {
        if (!(error instanceof Refused || error instanceof Gone)) throw error;
        line = error.message;
      } finally {
        isBusy = false;
      }
      if (!dialog.open || !form.isConnected) return; // left meanwhile
      refuse(line);
      if (line) return;
      answer = given;
      dialog.close();
    };
    const main = buttons.find((button) => button.isMain) ?? buttons[0];
    const form = el("form", { method: "dialog", on: { submit: (event) => {
      event.preventDefault();
      done(buttons.find((button) => button.value === event.submitter?.value) ?? main);
    } } },
      ...lines.map((line) => el("p", {}, line)),
      ...fields.map((field, k) => el("p", { class: "field" }, el("label", { for: `q-${field.name}` }, field.label), inputs[k][1])),
      fault,
      el("p", { class: "buttons" }, el("button", { type: "button", on: { click: () => dialog.close() } }, "Cancel"),
        ...buttons.map((button) => el("button", { type: "submit", value: button.value, class: button === main ? "main" : null }, button.text))));
    byId("question-body").replaceChildren(form);
    dialog.addEventListener("close", () => resolve(answer), { once: true });
    dialog.showModal();
    (inputs[0]?.[1] ?? form.querySelector("button.main")).focus();
    inputs[0]?.[1].select?.();
  });
}
