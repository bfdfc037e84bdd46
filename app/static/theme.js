// Light, dark, or as the system has it.

import { setText, set } from "./dom.js";

const ORDER = ["system", "light", "dark"];

export function theme(button) {
  const root = document.documentElement;
  const show = () => {
    const name = root.dataset.theme;
    setText(button.querySelector(".button-text"), name === "system" ? "Auto" : name === "light" ? "Light" : "Dark");
    set(button, { title: `light and dark: ${name} (L)` });
  };
  const next = () => {
    root.dataset.theme = ORDER[(ORDER.indexOf(root.dataset.theme) + 1) % ORDER.length];
    localStorage.setItem("lamwright-theme", root.dataset.theme);
    show();
  };
  button.addEventListener("click", next);
  show();
  return next;
}
