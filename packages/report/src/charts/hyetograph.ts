import { ticks } from "d3-array";
import type { Hyetograph, StepSeries } from "../input.ts";
import { html, type Markup } from "../text/html.ts";
import { mmText, svgNumber } from "../text/numbers.ts";
import { timeTicks } from "../text/times.ts";
import { hatchPattern } from "./hatch.ts";
import { SIDE_WORDS } from "./sides.ts";
import { observedSumMm, stepCount } from "./steps.ts";

const WIDTH = 360;
const HEIGHT = 178;
const MARGIN = { left: 34, right: 8, top: 10, bottom: 40 };

/** Edges of the bars of one side, as path data; steps below the width of a hair are still drawn. */
function bars(
  side: StepSeries,
  x: (step: number) => number,
  y: (mm: number) => number,
  floor: number,
): string {
  let path = "";
  for (let step = 0; step < side.depthMm.length; step += 1) {
    const mm = side.depthMm[step];
    if (!(mm > 0)) continue;
    const left = svgNumber(x(step) + 0.3);
    const right = svgNumber(Math.max(x(step) + 0.8, x(step + 1) - 0.3));
    path += `M${left} ${floor}V${svgNumber(y(mm))}H${right}V${floor}Z`;
  }
  return path;
}

/** A line along the tops of the steps, broken where a step was not observed. */
function stepLine(side: StepSeries, x: (step: number) => number, y: (mm: number) => number): string {
  let path = "";
  let drawing = false;
  for (let step = 0; step < side.depthMm.length; step += 1) {
    const mm = side.depthMm[step];
    if (!Number.isFinite(mm)) {
      drawing = false;
      continue;
    }
    path += drawing ? `V${svgNumber(y(mm))}` : `M${svgNumber(x(step))} ${svgNumber(y(mm))}`;
    path += `H${svgNumber(x(step + 1))}`;
    drawing = true;
  }
  return path;
}

/** Most cut bars of one chart that bear their depth; more would run into each other. */
const MOST_CUT_WORDS = 4;

/** Depths of the deepest steps that the axis does not reach up to, written beside their cut tops. */
function cutWords(side: StepSeries, row: number, x: (step: number) => number, topMm: number): Markup[] {
  return Array.from(side.depthMm, (mm, step) => ({ mm, step }))
    .filter(({ mm }) => mm > topMm)
    .sort((a, b) => b.mm - a.mm)
    .slice(0, MOST_CUT_WORDS)
    .map(({ mm, step }) => {
      const right = x(step + 1) + 3;
      const leans = right > WIDTH - 60;
      return html`<text class="cut" x="${svgNumber(leans ? x(step) - 3 : right)}" y="${MARGIN.top + 9 + 13 * row}" text-anchor="${leans ? "end" : "start"}">↑ ${mmText(mm)} mm</text>`;
    });
}

/** The steps of a side in which nothing was observed, as one path of whole columns. */
function gaps(side: StepSeries, x: (step: number) => number, floor: number): string {
  let path = "";
  for (let step = 0; step < side.depthMm.length; step += 1) {
    if (!Number.isNaN(side.depthMm[step])) continue;
    let end = step;
    while (end + 1 < side.depthMm.length && Number.isNaN(side.depthMm[end + 1])) end += 1;
    path += `M${svgNumber(x(step))} ${MARGIN.top}H${svgNumber(x(end + 1))}V${floor}H${svgNumber(x(step))}Z`;
    step = end;
  }
  return path;
}

/**
 * Rain against time at one place, in mm per step: the first side as bars, the second as a line along the
 * tops; further sides are not drawn. Steps in which a side saw nothing are hatched, rising for the first side, falling for the second.
 *
 * @param id - unique on the page
 * @param zone - zone of the upper row of times; the lower row is UTC
 * @param topMm - end of the depth axis, above 0: charts side by side share it; what is deeper is cut there
 *   and bears its depth
 */
export function svgHyetograph(id: string, graph: Hyetograph, zone: string, topMm: number): Markup {
  const count = stepCount(graph);
  const window = { startEpochMs: graph.startEpochMs, endEpochMs: graph.startEpochMs + count * graph.stepMs };
  const innerWidth = WIDTH - MARGIN.left - MARGIN.right;
  const floor = HEIGHT - MARGIN.bottom;
  const x = (step: number) => MARGIN.left + (innerWidth * step) / Math.max(1, count);
  const y = (mm: number) => floor - ((floor - MARGIN.top) * Math.min(mm, topMm)) / topMm;
  const times = timeTicks(window, zone, 4);
  const sums = graph.sides.slice(0, 2).map((side) => {
    const sum = observedSumMm(side);
    return `${SIDE_WORDS[side.role]} ${Number.isNaN(sum) ? "not observed" : `${mmText(sum)} mm`}`;
  });
  const [first, second] = graph.sides;
  return html`<svg class="chart hyetograph" role="img" aria-labelledby="${id}-title ${id}-desc" viewBox="0 0 ${WIDTH} ${HEIGHT}"><title id="${id}-title">Rain against time: ${graph.label}</title><desc id="${id}-desc">Millimetres per ${svgNumber(graph.stepMs / 60_000)} minutes. Sum of observed steps: ${sums.join(", ")}.</desc><defs>${hatchPattern(`${id}-gap0`)}${hatchPattern(`${id}-gap1`, "falling")}</defs><g class="axis">${ticks(
    0,
    topMm,
    3,
  ).map(
    (mm) =>
      html`<path class="grid-line" d="M${MARGIN.left} ${svgNumber(y(mm))}H${WIDTH - MARGIN.right}"/><text class="depth" x="${MARGIN.left - 5}" y="${svgNumber(y(mm) + 4)}" text-anchor="end">${mm}</text>`,
  )}${times.map(({ epochMs, local, utc }) => {
    const tx = svgNumber(x((epochMs - window.startEpochMs) / graph.stepMs));
    // Words at the ends lean inwards, so that the frame does not cut them.
    const anchor = tx < MARGIN.left + 12 ? "start" : tx > WIDTH - MARGIN.right - 14 ? "end" : "middle";
    return html`<path d="M${tx} ${floor}v4"/><text x="${tx}" y="${floor + 16}" text-anchor="${anchor}">${local}</text><text class="quiet" x="${tx}" y="${floor + 31}" text-anchor="${anchor}">${utc}</text>`;
  })}<text x="2" y="${floor + 16}">local</text><text class="quiet" x="2" y="${floor + 31}">UTC</text></g>${
    first && html`<path class="gap" d="${gaps(first, x, floor)}" fill="url(#${id}-gap0)"/>`
  }${second && html`<path class="gap" d="${gaps(second, x, floor)}" fill="url(#${id}-gap1)"/>`}${
    first &&
    html`<path class="bars ${first.role}" d="${bars(first, x, y, floor)}"/>${cutWords(first, 0, x, topMm)}`
  }${second && html`<path class="step-line ${second.role}" d="${stepLine(second, x, y)}"/>${cutWords(second, 1, x, topMm)}`}<path class="base" d="M${MARGIN.left} ${floor}H${WIDTH - MARGIN.right}"/></svg>`;
}
