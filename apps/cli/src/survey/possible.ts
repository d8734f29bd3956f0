import { counted, lengthText, utcText } from "../ui/numbers.ts";
import type { Findings } from "./findings.ts";

/** Said wherever somebody might take a single look for a total. */
export const RATE_NOT_TOTAL = "one instant per site is a rate, not a total";

/** What can be made of the findings, one sentence each. */
export function possibleTexts(
  findings: Pick<Findings, "radars" | "gauges" | "stations" | "catchments" | "grids" | "window">,
  radarsInWindow: ReadonlySet<string>,
): string[] {
  const sentences = sentencesOf(findings, radarsInWindow);
  const layers = findings.grids.reduce((sum, grid) => sum + grid.layerCount, 0);
  if (layers > 0)
    sentences.push(`nothing yet from ${counted(layers, "gridded layer")}: totals start from polar scans`);
  return sentences;
}

function sentencesOf(
  findings: Pick<Findings, "radars" | "gauges" | "stations" | "catchments" | "window">,
  radarsInWindow: ReadonlySet<string>,
): string[] {
  const { radars, gauges, catchments, window } = findings;
  if (radars.length === 0) return ["no total: there is no scan that can be read"];
  if (window === null) return [`no total: ${RATE_NOT_TOTAL}; at least two rounds of one radar are needed`];
  const [from, to] = [Date.parse(window.from), Date.parse(window.to)];
  const users = [...radarsInWindow];
  const sentences = [
    `a total for ${utcText(from)} to ${utcText(to)} (${lengthText(to - from)}) from ${counted(users.length, "radar")}: ${users.join(", ")}`,
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
