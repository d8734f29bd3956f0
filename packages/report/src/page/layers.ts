import type { PageData } from "../data/contract.ts";
import { TILES } from "../map/tiles.ts";
import { printedInches } from "./depths.ts";
import { el, need, svg } from "./dom.ts";
import type { Choice, Store } from "./store.ts";

/** The buttons that are there without script go on working; the other layers get a list beside them. */
export function layerControls(data: PageData, store: Store): void {
  const block = need<HTMLElement>(".map-block");
  const buttons = [...block.querySelectorAll<HTMLInputElement>("input[name=map-layer]")];
  const main = data.layers.flatMap(({ group }, index) => (group === "" ? [index] : []));
  const groups = [...new Set(data.layers.map(({ group }) => group).filter((group) => group !== ""))];
  const list = el("select", { id: "more-layers" }, el("option", { value: "" }, "choose a layer"));
  for (const group of groups) {
    const options = data.layers.flatMap((layer, index) =>
      layer.group === group ? [el("option", { value: index }, layer.label)] : [],
    );
    list.append(el("optgroup", { label: group }, ...options));
  }
  for (const [at, input] of buttons.entries()) {
    // Without script they must stand beside the map, as its siblings; with it a button keeps to its words.
    const words = need(`label[for=${input.id}]`, block);
    const pair = el("span", { class: "choice" });
    input.before(pair);
    pair.append(input, words);
    input.addEventListener("change", () => {
      if (input.checked) store.set({ layer: main[at] });
    });
  }
  list.addEventListener("change", () => {
    if (list.value !== "") store.set({ layer: Number(list.value) });
  });
  if (groups.length > 0) {
    const label = el("label", { for: "more-layers" }, "More layers");
    need(".map-body", block).before(el("span", { class: "choice" }, label, list));
  }
  const show = ({ layer }: Choice) => {
    for (const [at, input] of buttons.entries()) input.checked = main[at] === layer;
    list.value = main.includes(layer) ? "" : String(layer);
  };
  store.on(["layer"], show);
  show(store.choice);
}

/** The legend of what is shown, in the reader's unit. */
export function legend(data: PageData, store: Store): void {
  const side = need<HTMLElement>(".map-side");
  for (const old of side.querySelectorAll(".legend")) old.remove();
  const home = el("div", { class: "live-legend" });
  side.prepend(home);
  const show = ({ layer: index, frame, unit }: Choice) => {
    const layer = data.layers[index];
    const frames = frame < 0 ? undefined : layer.frames;
    const { colours, labels } = frames?.classes ?? layer.classes;
    const inches = layer.unit === "mm" && unit === "in";
    const words = layer.names ?? labels;
    const field = frames?.fields ?? layer.field;
    const heading = layer.unit === "mm" ? unit : layer.unit;
    home.replaceChildren(
      el(
        "h3",
        {},
        layer.label,
        el("span", {}, frames === undefined ? heading : `${heading} in the interval`),
      ),
      el(
        "ul",
        { class: "classes" },
        ...words.map((label, at) =>
          el(
            "li",
            {},
            swatch(colours[at], layer.names === undefined ? "" : TILES[at % TILES.length]),
            inches ? label.replace(/\d+(?:\.\d+)?/g, printedInches) : label,
          ),
        ),
        el("li", {}, swatch("", "M0 14L14 0M8 14L22 0M-8 14L6 0M16 14L30 0"), "not observed"),
      ),
      el("p", {}, layer.what, ...stepWords(layer.unit, field.step, frames?.note ?? "")),
    );
  };
  store.on(["layer", "frame", "unit"], show);
  show(store.choice);
}

function stepWords(unit: string, step: number, note: string): string[] {
  const words = unit === "" ? "" : ` Held in this page by steps of ${step} ${unit}.`;
  return [words, note === "" ? "" : ` ${note}`];
}

function swatch(colour: string, lines: string): SVGSVGElement {
  return svg(
    "svg",
    { class: "swatch", width: 22, height: 14, viewBox: "0 0 22 14", "aria-hidden": "true" },
    svg("rect", {
      class: "swatch-frame",
      x: 0.5,
      y: 0.5,
      width: 21,
      height: 13,
      fill: colour === "" ? "#fdfdfb" : colour,
    }),
    lines !== "" && svg("path", { class: colour === "" ? "swatch-hatch" : "tile", d: lines }),
  );
}
