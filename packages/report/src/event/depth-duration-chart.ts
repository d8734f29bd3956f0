import { scaleLog } from "d3-scale";
import { html, type Markup } from "../text/html.ts";
import { mmText, svgNumber } from "../text/numbers.ts";
import { durationText } from "./duration-text.ts";
import type { EventPeak, FrequencyCurve } from "./event-input.ts";

const WIDTH = 360;
const HEIGHT = 250;
const MARGIN = { left: 40, right: 40, top: 12, bottom: 34 };
/** Marks of the axes; those within the range are drawn. */
const MINUTES = [5, 15, 60, 180, 720, 1440, 4320, 10_080];
const DEPTHS_MM = [0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50, 100, 200, 500, 1000];

/**
 * Largest depths against duration, both logarithmic, over the curves of a table of return periods. A depth that is a
 * lower bound has an arrow upwards; an interval is a bar.
 *
 * @param id - unique on the page
 * @param title - what is drawn, for who hears the page
 */
export function svgDepthDuration(
  id: string,
  title: string,
  peaks: readonly EventPeak[],
  curves: readonly FrequencyCurve[],
): Markup {
  const wet = peaks.filter(({ depthMm }) => depthMm > 0);
  if (wet.length === 0) return html`<p>No rain to draw.</p>`;
  const lengths = wet.map(({ durationMinutes }) => durationMinutes);
  const [least, most] = [Math.min(...lengths), Math.max(...lengths)];
  const x = scaleLog([least / 1.15, most * 1.15], [MARGIN.left, WIDTH - MARGIN.right]);
  // Only what of the curves lies among the durations decides how high the chart reaches.
  const inRange = curves.map(({ years, durationMinutes, depthMm }) => ({
    years,
    points: durationMinutes.flatMap((minutes, k) =>
      minutes >= least / 1.15 && minutes <= most * 1.15 ? [{ minutes, mm: depthMm[k] }] : [],
    ),
  }));
  const depths = [
    ...wet.flatMap(({ depthMm, p10Mm, p90Mm }) => [depthMm, p10Mm, p90Mm]),
    ...inRange.flatMap(({ points }) => points.map(({ mm }) => mm)),
  ].filter((mm) => mm > 0);
  const y = scaleLog(
    [Math.min(...depths) / 1.25, Math.max(...depths) * 1.25],
    [HEIGHT - MARGIN.bottom, MARGIN.top],
  );
  const [px, py] = [(minutes: number) => svgNumber(x(minutes)), (mm: number) => svgNumber(y(mm))];
  const floor = HEIGHT - MARGIN.bottom;
  const [bottomMm, topMm] = y.domain();
  const words = wet.map(
    ({ durationMinutes, depthMm, lowerBound }) =>
      `${durationText(durationMinutes)} ${lowerBound ? "at least " : ""}${mmText(depthMm)} mm`,
  );
  // From the rarest down, so that no two names of curves run into each other.
  let lowestName = Number.NEGATIVE_INFINITY;
  const names = inRange
    .toReversed()
    .filter(({ points }) => points.length > 0)
    .map(({ years, points }) => {
      const last = points[points.length - 1];
      lowestName = Math.max(py(last.mm) + 4, lowestName + 12);
      return html`<text class="period-name" x="${px(last.minutes) + 4}" y="${svgNumber(lowestName)}">${years} a</text>`;
    });
  return html`<svg class="chart depth-duration" role="img" aria-labelledby="${id}-title ${id}-desc" viewBox="0 0 ${WIDTH} ${HEIGHT}"><title id="${id}-title">${title}</title><desc id="${id}-desc">${words.join(", ")}.</desc><g class="axis">${DEPTHS_MM.filter(
    (mm) => mm >= bottomMm && mm <= topMm,
  ).map(
    (mm) =>
      html`<path class="grid-line" d="M${MARGIN.left} ${py(mm)}H${WIDTH - MARGIN.right}"/><text x="${MARGIN.left - 5}" y="${py(mm) + 4}" text-anchor="end">${mm}</text>`,
  )}${MINUTES.filter((minutes) => minutes >= least / 1.15 && minutes <= most * 1.15).map(
    (minutes) =>
      html`<path d="M${px(minutes)} ${floor}v4"/><text x="${px(minutes)}" y="${floor + 16}" text-anchor="middle">${durationText(minutes)}</text>`,
  )}<text x="2" y="${MARGIN.top - 2}">mm</text></g>${inRange
    .filter(({ points }) => points.length > 0)
    .map(({ points }) => {
      const path = points.map(({ minutes, mm }, k) => `${k === 0 ? "M" : "L"}${px(minutes)} ${py(mm)}`);
      return html`<path class="period" d="${path.join("")}"/>`;
    })}${names}<path class="base" d="M${MARGIN.left} ${floor}H${WIDTH - MARGIN.right}"/>${wet.map((peak) => {
    const { durationMinutes, depthMm, p10Mm, p90Mm, lowerBound } = peak;
    const [cx, cy] = [px(durationMinutes), py(depthMm)];
    return html`${
      p10Mm > 0 && p90Mm > 0 && html`<path class="interval" d="M${cx} ${py(p10Mm)}V${py(p90Mm)}"/>`
    }${lowerBound && html`<path class="bound" d="M${cx} ${cy}v-14m-4 5l4 -5l4 5"/>`}<circle class="peak" cx="${cx}" cy="${cy}" r="4"/>`;
  })}</svg>`;
}
