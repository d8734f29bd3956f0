import { hatchPattern, swatch } from "../charts/hatch.ts";
import { svgHyetograph } from "../charts/hyetograph.ts";
import { SIDE_WORDS } from "../charts/sides.ts";
import { coarsen, deepestStepMm, observedSumMm, stepCount } from "../charts/steps.ts";
import type { Hyetograph, ReportInput, StepSeries } from "../input.ts";
import { missing } from "../text/figures.ts";
import { html, joined, type Markup } from "../text/html.ts";
import { atLeastText, counted, mmText, percentText } from "../text/numbers.ts";
import { zoned } from "../text/times.ts";

/** More charts than this would make the file heavy and the page endless; the rest is in the run's tables. */
export const MOST_CHARTS = 60;

/** Rain against time at gauges and over catchments. */
export function hyetographSection(input: ReportInput): Markup {
  const groups = [
    { id: "catchment", heading: "Catchments", graphs: input.catchmentHyetographs },
    { id: "gauge", heading: "Gauges", graphs: input.gaugeHyetographs },
  ].filter(({ graphs }) => graphs.length > 0);
  if (groups.length === 0) return html``;
  return html`<section id="time" aria-labelledby="time-heading"><h2 id="time-heading">Rain against time</h2>${groups.map(
    ({ id, heading, graphs }) => chartGroup(id, heading, graphs, input.zone),
  )}</section>`;
}

function chartGroup(id: string, heading: string, graphs: readonly Hyetograph[], zone: string): Markup {
  const dry = graphs.filter(isDryThroughout);
  const wet = graphs.filter((graph) => !isDryThroughout(graph));
  const shown = wet.slice(0, MOST_CHARTS).map((graph) => coarsen(graph));
  const topMm = Math.max(0.5, commonTopMm(shown));
  const cut = deepestStepMm(shown) > topMm;
  const minutes = [...new Set(shown.map((graph) => graph.stepMs / 60_000))];
  const left = wet.length - shown.length;
  const dryLine =
    dry.length > 0 &&
    html`<p class="small">Dry on every side throughout, and so not drawn: ${joined(
      dry.map(({ label }) => label),
      ", ",
    )}.</p>`;
  if (shown.length === 0) return html`<h3>${heading}</h3>${dryLine}`;
  return html`<h3>${heading}</h3><p class="lead">mm per ${joined(minutes, " or ")} minutes, all on one scale. ${cut && "What is cut off at the top bears its depth. "}${zone === "UTC" ? "" : `Upper row of times: ${zone}. `}${
    left > 0 && `The first ${counted(shown.length, "chart")}; ${counted(left, "more series")} not drawn. `
  }</p>${key(shown)}<div class="multiples">${shown.map((graph, index) => chart(`${id}-chart-${index}`, graph, zone, topMm))}</div>${dryLine}`;
}

/** A chart this many times deeper than all but a tenth of the others is cut, or it would flatten them. */
const CUT_ABOVE = 3;

/** End of the depth axis that charts share: their deepest step, but for single charts far beyond the others. */
function commonTopMm(graphs: readonly Hyetograph[]): number {
  const deepest = graphs.map((graph) => deepestStepMm([graph])).sort((a, b) => b - a);
  const usual = deepest[Math.ceil(0.1 * graphs.length)] ?? deepest[0];
  return deepest[0] > CUT_ABOVE * usual ? 1.1 * usual : deepest[0];
}

/** True where every step of every side was fully seen and held no rain. */
function isDryThroughout({ sides }: Hyetograph): boolean {
  return sides.every(
    ({ depthMm, observedFraction }) =>
      Array.from(depthMm).every((mm) => mm === 0) && Array.from(observedFraction).every(isSeen),
  );
}

/** Shares a hair below one come from float32, not from a hole. */
function isSeen(fraction: number): boolean {
  return fraction >= 0.9995;
}

function key(graphs: readonly Hyetograph[]): Markup {
  const [first, second] = (graphs.find((graph) => graph.sides.length > 1) ?? graphs[0]).sides;
  const gap = (side: StepSeries, slant: "rising" | "falling") =>
    html`<li>${swatch(
      html`<defs>${hatchPattern(`key-${side.role}-${slant}`, slant)}</defs><rect class="swatch-frame hollow" x="0.5" y="0.5" width="21" height="13"/><rect x="0.5" y="0.5" width="21" height="13" fill="url(#key-${side.role}-${slant})"/>`,
    )}${SIDE_WORDS[side.role]} not observed</li>`;
  return html`<ul class="key">${
    first &&
    html`<li>${swatch(html`<path class="bars ${first.role}" d="M4 14V4H10V14ZM12 14V8H18V14Z"/>`)}${SIDE_WORDS[first.role]}</li>`
  }${second && html`<li>${swatch(html`<path class="step-line ${second.role}" d="M1 11H8V4H15V9H21"/>`)}${SIDE_WORDS[second.role]}</li>`}${
    first && gap(first, "rising")
  }${second && gap(second, "falling")}</ul>`;
}

function sumText(side: StepSeries): string {
  const sum = observedSumMm(side);
  return `${SIDE_WORDS[side.role]} ${Number.isNaN(sum) ? "not observed" : `${mmText(sum)} mm`}`;
}

function chart(id: string, graph: Hyetograph, zone: string, topMm: number): Markup {
  return html`<figure class="multiple"><figcaption><b>${graph.label}</b><span>${joined(graph.sides.slice(0, 2).map(sumText), " · ")}</span></figcaption>${svgHyetograph(
    id,
    graph,
    zone,
    topMm,
  )}<details><summary>Numbers</summary>${stepTable(graph, zone)}</details></figure>`;
}

function stepTable(graph: Hyetograph, zone: string): Markup {
  const steps = Array.from({ length: stepCount(graph) }, (_, step) => step);
  return html`<div class="scroll tall" role="region" tabindex="0" aria-label="Numbers of ${graph.label}"><table><caption>${graph.label}: mm in the step that ends at the time given, over the part observed</caption><thead><tr><th scope="col">Local</th><th scope="col">UTC</th>${graph.sides.map(
    ({ role }) => html`<th scope="col" class="number">${SIDE_WORDS[role]} mm</th>`,
  )}</tr></thead><tbody>${steps.map((step) => {
    const local = zoned(graph.startEpochMs + (step + 1) * graph.stepMs, zone);
    return html`<tr><th scope="row">${local.toFormat("d LLL HH:mm")}</th><td>${local.toUTC().toFormat("HH:mm")}</td>${graph.sides.map(
      (side) => html`<td class="number">${stepCell(side, step)}</td>`,
    )}</tr>`;
  })}</tbody></table></div>`;
}

function stepCell(side: StepSeries, step: number): Markup {
  const mm = side.depthMm[step];
  const share = side.observedFraction[step];
  if (mm === undefined || !Number.isFinite(mm)) return missing("not observed");
  return !isSeen(share)
    ? html`${atLeastText(mm)} <span class="sub">${percentText(share)} seen</span>`
    : html`${mmText(mm)}`;
}
