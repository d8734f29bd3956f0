import { scaleSqrt } from "d3-scale";
import type { GaugeRole } from "../input.ts";
import { html, type Markup } from "../text/html.ts";
import { mmText, svgNumber } from "../text/numbers.ts";
import { placeLabels } from "./labels.ts";
import { gaugeMark } from "./marks.ts";

/** One gauge of a scatter. Depths are finite and not negative. */
export interface ScatterPoint {
  readonly label: string;
  readonly role: GaugeRole;
  readonly gaugeMm: number;
  readonly radarMm: number;
  /** Shown on hover. */
  readonly words: string;
  /** Key of the gauge, by which the page's script links its marks. */
  readonly key?: string;
}

const SIDE = 440;
const MARGIN = { left: 56, right: 40, top: 24, bottom: 48 };
const LABEL_PX = 11;
/** Round depths on both axes; those that a square-root axis leaves room for are drawn. */
const TICKS_MM = [0, 1, 2, 5, 10, 20, 40, 60, 80, 100, 150, 200, 300, 400, 600, 800, 1200, 1600, 2400];

/**
 * Gauge against radar on square-root axes, which open up small depths and still show zeros, with the line of
 * equality and the lines of a factor of two.
 *
 * @param id - unique on the page
 * @param radarAxis - what the upward axis holds, with its unit
 */
export function svgScatter(
  id: string,
  title: string,
  radarAxis: string,
  points: readonly ScatterPoint[],
): Markup {
  const most = Math.max(1, ...points.flatMap(({ gaugeMm, radarMm }) => [gaugeMm, radarMm])) * 1.08;
  const inner = SIDE - MARGIN.left - MARGIN.right;
  const across = scaleSqrt([0, most], [MARGIN.left, MARGIN.left + inner]);
  const upwards = scaleSqrt([0, most], [MARGIN.top + inner, MARGIN.top]);
  const bottom = MARGIN.top + inner;
  const right = MARGIN.left + inner;
  const height = bottom + MARGIN.bottom;
  const ticksMm = spaced(
    TICKS_MM.filter((mm) => mm <= most),
    (mm) => across(mm),
    26,
  );
  const line = (ratio: number) => {
    const endMm = ratio > 1 ? most / ratio : most;
    return `M${MARGIN.left} ${bottom}L${svgNumber(across(endMm))} ${svgNumber(upwards(endMm * ratio))}`;
  };
  const marks = points.map((point) => ({
    ...point,
    x: across(point.gaugeMm),
    y: upwards(point.radarMm),
    text: point.label,
  }));
  const labels = placeLabels(marks, { x: MARGIN.left, y: MARGIN.top, width: inner, height: inner }, LABEL_PX);
  return html`<svg class="chart scatter" role="img" aria-labelledby="${id}-title ${id}-desc" viewBox="0 0 ${SIDE} ${height}"><title id="${id}-title">${title}</title><desc id="${id}-desc">${points.length} gauges on square-root axes. Above the line of equality radar saw more than the gauge. The numbers are in the table of gauges.</desc><g class="axis">${ticksMm.map(
    (mm) =>
      html`<path class="grid-line" d="M${svgNumber(across(mm))} ${MARGIN.top}V${bottom}M${MARGIN.left} ${svgNumber(upwards(mm))}H${right}"/><text class="depth" x="${svgNumber(across(mm))}" y="${bottom + 18}" text-anchor="middle">${mm}</text><text class="depth" x="${MARGIN.left - 8}" y="${svgNumber(upwards(mm) + 4)}" text-anchor="end">${mm}</text>`,
  )}<rect class="frame" x="${MARGIN.left}" y="${MARGIN.top}" width="${inner}" height="${inner}"/><text x="${MARGIN.left + inner / 2}" y="${height - 8}" text-anchor="middle">gauge, mm</text><text transform="translate(14 ${MARGIN.top + inner / 2}) rotate(-90)" text-anchor="middle">${radarAxis}</text></g><path class="equal" d="${line(1)}"/><path class="factor" d="${line(2)}${line(0.5)}"/><g class="line-names"><text x="${svgNumber(across(most / 2))}" y="${MARGIN.top - 8}" text-anchor="middle">radar/gauge 2</text><text x="${right + 6}" y="${svgNumber(upwards(most / 2) + 4)}">½</text><text x="${right + 6}" y="${MARGIN.top + 4}">1 : 1</text></g>${marks.map(
    ({ role, x, y, words, key }) => gaugeMark(role, x, y, words, key),
  )}${labels.map(
    ({ text, x, y, anchor }) =>
      html`<text class="gauge-label" x="${svgNumber(x)}" y="${svgNumber(y)}" text-anchor="${anchor}">${text}</text>`,
  )}</svg>`;
}

/** Those values that lie far enough from the one before, largest first so that the upper end is marked. */
function spaced(valuesMm: readonly number[], place: (mm: number) => number, least: number): number[] {
  const kept: number[] = [];
  for (const mm of [...valuesMm].reverse()) {
    if (kept.length === 0 || place(kept[kept.length - 1]) - place(mm) >= least) kept.push(mm);
  }
  return kept.reverse();
}

/** The words that a mark of the scatter says on hover. */
export function scatterWords(name: string, gaugeMm: number, radarMm: number, side: string): string {
  return `${name}: gauge ${mmText(gaugeMm)} mm, ${side} ${mmText(radarMm)} mm`;
}
