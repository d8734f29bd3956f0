import { el, need } from "./dom.ts";
import type { Store } from "./store.ts";

/** Switches for the unit of depths and for light and dark, at the head of the page. */
export function pageTools(store: Store): void {
  const unit = choice("Depths in", "unit", [
    ["mm", "mm"],
    ["in", "inch"],
  ]);
  unit.addEventListener("change", (event) => {
    store.set({ unit: chosenIn(event) === "in" ? "in" : "mm" });
  });
  const light = choice("Page", "light", [
    ["", "as the system"],
    ["light", "light"],
    ["dark", "dark"],
  ]);
  light.addEventListener("change", (event) => {
    const theme = chosenIn(event);
    if (theme === "") document.documentElement.removeAttribute("data-theme");
    else document.documentElement.setAttribute("data-theme", theme);
  });
  need("header").prepend(el("div", { class: "page-tools" }, unit, light));
}

function chosenIn({ target }: Event): string {
  return target instanceof HTMLInputElement ? target.value : "";
}

function choice(
  words: string,
  name: string,
  options: readonly (readonly [value: string, label: string])[],
): HTMLFieldSetElement {
  return el(
    "fieldset",
    {},
    el("legend", {}, words),
    ...options.map(([value, label], at) =>
      el("label", {}, el("input", { type: "radio", name, value, checked: at === 0 }), label),
    ),
  );
}
