import { counted, lengthText, utcText } from "../ui/numbers.ts";
import type { Findings } from "./findings.ts";
import type { GridSource } from "./grid-sources.ts";

/** Said wherever somebody might take a single look for a total. */
export const RATE_NOT_TOTAL = "one instant per site is a rate, not a total";

/** What can be made of the findings, one sentence each. */
export function possibleTexts(
  findings: Pick<Findings, "radars" | "gauges" | "stations" | "catchments" | "grids" | "window">,
  radarsInWindow: ReadonlySet<string>,
  sources: readonly GridSource[],
): string[] {
  return [...sentencesOf(findings, radarsInWindow, sources), ...sources.flatMap(gridSentences)];
}

function gridSentences({ id, quantity, spans, inWindow }: GridSource): string[] {
  const layers = counted(spans.length, "gridded layer");
  if (inWindow)
    return [
      `what was corrected in "${id}" before, and whether gauges were used, is not known: ask its maker`,
    ];
  if (quantity !== "depth" && spans.length < 2)
    return [`nothing from ${layers} of ${quantity}: ${RATE_NOT_TOTAL}`];
  return [`${layers} of ${quantity} besides ("${id}"), switched off in a plan: no rain should go in twice`];
}

function sentencesOf(
  findings: Pick<Findings, "radars" | "gauges" | "stations" | "catchments" | "window">,
  radarsInWindow: ReadonlySet<string>,
  sources: readonly GridSource[],
): string[] {
  const { radars, gauges, catchments, window } = findings;
  if (radars.length + sources.length === 0)
    return ["no total: there is no scan that can be read, and no gridded rain"];
  if (window === null) return [`no total: ${RATE_NOT_TOTAL}; at least two rounds of one radar are needed`];
  const [from, to] = [Date.parse(window.from), Date.parse(window.to)];
  const users = [...radarsInWindow];
  const grids = sources.filter(({ inWindow }) => inWindow);
  const layers = grids.reduce((sum, { spans }) => sum + spans.length, 0);
  const basis =
    users.length > 0
      ? `${counted(users.length, "radar")}: ${users.join(", ")}`
      : `${counted(layers, "gridded layer")}: ${grids.map(({ id }) => id).join(", ")}`;
  const sentences = [
    `a total for ${utcText(from)} to ${utcText(to)} (${lengthText(to - from)}) from ${basis}`,
  ];
  for (const radar of radars) {
    if (radarsInWindow.has(radar.id)) continue;
    const why = radar.roundCount < 2 ? RATE_NOT_TOTAL : "its scans are of another time";
    sentences.push(`nothing from radar ${radar.id}: ${why}`);
  }
  const areas = catchments.reduce((sum, map) => sum + map.polygonCount, 0);
  sentences.push(
    areas > 0
      ? `depths by catchment: ${counted(areas, "area")}`
      : "no depths by catchment: there is no map of them (GeoJSON, Shapefile, GeoPackage)",
  );
  const placed = gauges.reduce(
    (sum, file) =>
      sum + (file.stationsFile === undefined ? 0 : file.gaugeIds.length - file.withoutStation.length),
    0,
  );
  if (placed > 0) {
    sentences.push(
      `${counted(placed, "gauge")} beside their radar cells${window.basis === "radars" ? ", though they cover little of the scans' time" : ""}`,
    );
  } else if (gauges.length > 0) {
    sentences.push("no gauge beside the radar: their stations are not known, or not by the same ids");
  } else {
    sentences.push("radar only: without gauges there are no scores and no adjustment");
  }
  return sentences;
}
