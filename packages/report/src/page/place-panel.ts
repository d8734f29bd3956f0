import { SIDE_WORDS } from "../charts/sides.ts";
import type { PageData, PagePlace, PageSeries } from "../data/contract.ts";
import { depthText, inInches, type Unit } from "./depths.ts";
import { button, el, need } from "./dom.ts";
import { type SeriesChart, seriesChart } from "./series-chart.ts";
import type { Choice, Store } from "./store.ts";
import { tableTools } from "./tables.ts";
import type { Clock } from "./times.ts";

const KINDS: readonly (readonly [PagePlace["kind"], string])[] = [
  ["catchment", "Catchments"],
  ["gauge", "Gauges"],
  ["asset", "Assets"],
  ["radar", "Radars"],
];

/** What is known of the place that was picked, beside or below the map. */
export function placePanel(data: PageData, store: Store, clock: Clock): void {
  const panel = el("section", { class: "place-panel", "aria-label": "The place looked at" });
  const rain = el("section", { class: "place-rain", "aria-label": "Its rain against time", hidden: true });
  need(".map-body").append(panel, rain);
  const finder = el("select", { id: "find-place" }, el("option", { value: "" }, "pick on the map, or here"));
  for (const [kind, words] of KINDS) {
    const options = data.places
      .filter((place) => place.kind === kind)
      .map(({ key, title, subtitle }) =>
        el("option", { value: key }, subtitle === "" ? title : `${title} · ${subtitle}`),
      );
    if (options.length > 0) finder.append(el("optgroup", { label: words }, ...options));
  }
  finder.addEventListener("change", () =>
    store.set({ place: finder.value === "" ? undefined : finder.value }),
  );
  const body = el("div", { class: "place-body" });
  let chart: SeriesChart | undefined;
  const showBand = ({ layer, frame }: Choice) => chart?.showBand(data.layers[layer].frames?.intervals[frame]);
  panel.append(el("p", { class: "finder" }, el("label", { for: "find-place" }, "Look at "), finder), body);

  const show = (choice: Choice) => {
    finder.value = choice.place ?? "";
    chart = undefined;
    const wasOpen = rain.querySelector("details")?.open ?? false;
    rain.replaceChildren();
    rain.hidden = true;
    const place = data.places.find(({ key }) => key === choice.place);
    if (place === undefined) {
      body.replaceChildren(
        el(
          "p",
          { class: "small" },
          "A gauge shows its rain beside the radar’s, its verdict and why; a catchment its depth and how it came down.",
        ),
      );
      return;
    }
    const { unit } = choice;
    const say = (text: string) => (unit === "mm" ? text : inInches(text));
    body.replaceChildren(
      el(
        "div",
        { class: "place-head" },
        el("h3", { tabindex: -1 }, place.title, el("span", { class: "sub" }, place.subtitle)),
        button("Close", () => {
          store.set({ place: undefined });
          need<HTMLElement>(".map-stage").focus();
        }),
      ),
      el(
        "dl",
        { class: "place-facts" },
        ...place.facts.map(([label, text]) => el("div", {}, el("dt", {}, label), el("dd", {}, say(text)))),
      ),
      ...place.cautions.map((caution) => el("p", { class: "place-caution" }, say(caution))),
    );
    if (place.series === undefined) return;
    rain.hidden = false;
    rain.append(...seriesOf(place, place.series, choice, wasOpen));
  };
  const seriesOf = (
    place: PagePlace,
    series: PageSeries,
    choice: Choice,
    wasOpen: boolean,
  ): HTMLElement[] => {
    const table = el("details", {}, el("summary", {}, "Numbers"));
    table.addEventListener("toggle", () => {
      if (table.open && table.childElementCount === 1)
        table.append(stepTable(place, series, choice.unit, clock));
    });
    table.open = wasOpen;
    chart = seriesChart(series, {
      id: "place-chart",
      title: place.title,
      unit: choice.unit,
      clock,
      width: Math.max(320, Math.min(760, rain.clientWidth - 28)),
      ...(place.range === undefined ? {} : { range: place.range }),
    });
    showBand(choice);
    const heading = el("h3", {}, `${place.title}: rain against time`);
    return [heading, chart.element, el("p", { class: "small" }, notesOn(place, series)), table];
  };
  store.on(["place", "unit"], show);
  store.on(["layer", "frame"], showBand);
  // Who chose by a key is taken to what came of it; who chose by the pointer sees it, and keeps the focus.
  let byKey = false;
  document.addEventListener("keydown", () => (byKey = true), true);
  document.addEventListener("pointerdown", () => (byKey = false), true);
  store.on(["place"], ({ place }) => {
    if (place !== undefined && byKey && document.activeElement !== finder) body.querySelector("h3")?.focus();
  });
  show(store.choice);
}

function notesOn({ kind }: PagePlace, { joined, sides }: PageSeries): string {
  const notes = [
    "Each side sums the steps that it observed; what it did not observe is hatched and adds nothing.",
  ];
  if (kind === "gauge" && sides.some(({ role }) => role === "held-out")) {
    notes.push("Adjusted without it: what the adjustment would give here had this gauge no part in it.");
  }
  if (joined) notes.push("Steps are joined to keep this page small.");
  return notes.join(" ");
}

function stepTable({ title }: PagePlace, series: PageSeries, unit: Unit, clock: Clock): HTMLElement {
  const count = Math.max(0, ...series.sides.map(({ centiMm }) => centiMm.length));
  const cell = (side: PageSeries["sides"][number], step: number) => {
    const centi = side.centiMm[step];
    if (centi === null || centi === undefined) return el("td", { class: "number" }, "– not observed");
    const share = side.partly.find(([which]) => which === step)?.[1];
    const depth = depthText(centi / 100, unit);
    return el("td", { class: "number" }, share === undefined ? depth : `≥ ${depth} (${share} % seen)`);
  };
  const rows = Array.from({ length: count }, (_, step) => {
    const end = series.startEpochMs + (step + 1) * series.stepMs;
    return el(
      "tr",
      {},
      el("th", { scope: "row" }, clock.dayAndHour(end)),
      el("td", {}, clock.utcHour(end)),
      ...series.sides.map((side) => cell(side, step)),
    );
  });
  const table = el(
    "table",
    {},
    el("caption", {}, `${title}: ${unit} in the step that ends at the time given`),
    el(
      "thead",
      {},
      el(
        "tr",
        {},
        el("th", { scope: "col" }, "Local"),
        el("th", { scope: "col" }, "UTC"),
        ...series.sides.map(({ role }) =>
          el("th", { scope: "col", class: "number" }, `${SIDE_WORDS[role]} ${unit}`),
        ),
      ),
    ),
    el("tbody", {}, ...rows),
  );
  const holder = el(
    "div",
    { class: "scroll tall", role: "region", tabindex: 0, "aria-label": `Numbers of ${title}` },
    table,
  );
  const home = el("div", {}, holder);
  tableTools(table, holder);
  return home;
}
