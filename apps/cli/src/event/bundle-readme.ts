import { displayText } from "@rainreckon/formats";
import { STANDING_CAUTIONS } from "../total/cautions.ts";
import { counted, depthText, placeText } from "../ui/numbers.ts";
import type { BundleFigure } from "./bundle-schema.ts";
import { boundedText } from "./event-words.ts";
import { areaText } from "./frequency-told.ts";

/** `README.txt` of a bundle: the figure, what stands behind it, and how it is made again. */
export function bundleReadme({
  figure,
  preparedBy,
}: {
  readonly figure: BundleFigure;
  readonly preparedBy: string | undefined;
}): string {
  const { place, run, headline, changedSettings, overrides, filesBehind, gaugesBehind, licences } = figure;
  const where =
    place.latDeg === null || place.lonDeg === null ? "" : `, ${placeText(place.lonDeg, place.latDeg)}`;
  const mm = (value: number | null) => (value === null ? "not known" : `${depthText(value)} mm`);
  const lines = [
    `${displayText(run.title)}: rain at ${place.kind} ${displayText(place.id)}${place.name === "" ? "" : ` (${displayText(place.name)})`}`,
    `${place.kind === "catchment" ? `${areaText(place.areaKm2)} km2` : `one grid cell of ${areaText(place.areaKm2)} km2`}${where}`,
    `Status: ${run.status}. Run digest: ${run.runDigest}. Made by rainreckon ${figure.version} on Node.js ${figure.node}.`,
    "",
    `Prepared by: ${preparedBy === undefined ? "________________________" : displayText(preparedBy)}`,
    "Checked by:  ________________________",
    "Date:        ________________________",
    "",
    "Depth of the window",
    `  the figure                             ${boundedText(headline.depthMm, headline.lowerBound)} mm${headline.lowerBound ? ", a lower bound: seen in part, or at the hail cap" : ""}`,
    `  share of area and time observed        ${headline.observedFraction.toFixed(4)}`,
    `  without adjustment to gauges           ${mm(headline.noAdjustmentMm)}`,
    `  by the gauges alone                    ${mm(headline.gaugesOnlyMm)}`,
    `  every setting at its default           ${mm(headline.defaultSettingsMm)} (before adjustment ${mm(headline.defaultSettingsNoAdjustmentMm)})`,
    headline.p10Mm === null || headline.p90Mm === null
      ? "  how sure it is                         the run does not say"
      : `  p10 to p90                             ${depthText(headline.p10Mm)} to ${mm(headline.p90Mm)}`,
    ...(headline.range3x3 === null
      ? []
      : [
          `  the ${headline.range3x3.cellCount} cells about the place            ${depthText(headline.range3x3.leastMm)} to ${mm(headline.range3x3.mostMm)}`,
        ]),
    "",
    "Settings that differ from their defaults",
    ...(changedSettings.length + overrides.length === 0 ? ["  none"] : []),
    ...changedSettings.map(
      ({ path, value, defaultValue }) =>
        `  ${displayText(path)}: ${displayText(value, 400)} (default ${displayText(defaultValue, 400)})`,
    ),
    ...overrides.map((override) => `  override: ${displayText(JSON.stringify(override), 400)}`),
    "",
    "How the figure is made again, from nothing but this folder and that version of rainreckon",
    ...figure.commands.map((command) => `  ${command}`),
    "  The result must be event.json, and the folder it was made in must hold what run/ holds, byte by byte.",
    "",
    "What is in here",
    "  inputs/            plan and every input of the run, as manifest.json has them; all have part in the figure",
    "  run/               every output of the run; run/manifest.json has the SHA-256 of each",
    "  tables/            tables of return periods and places that were used beside the run",
    "  event.json .txt .html   events, largest depths by duration and their return periods, in three forms",
    "  explain.json .txt  how the depth came to be, scan by scan",
    "  gauge-rows.csv     readings within the window of the gauges that move the figure, and of the nearest ten",
    "  figure.json        what stands above, for machines",
    "  checksums.sha256   SHA-256 of every file but itself",
    "",
    `Scans that spoke for the place: ${counted(filesBehind.length, "file")}`,
    ...filesBehind.map((file) => `  ${displayText(file, 400)}`),
    "",
    "Gauges that move the figure, most first",
    ...(gaugesBehind.length === 0 ? ["  none"] : gaugesBehind.map((gauge) => `  ${displayText(gauge)}`)),
    "",
    "Licences of the data",
    ...(licences.length === 0
      ? [
          "  not stated. To be filled in before this leaves the house:",
          "  radar: ____________  gauges: ____________",
        ]
      : licences.map((licence) => `  ${displayText(licence, 400)}`)),
    "",
    "Cautions",
    "  Those of the run stand in run/README.txt and event.txt. Always:",
    ...STANDING_CAUTIONS.map((caution) => `  - ${caution}`),
    "  - Return periods do not replace official warnings, local codes or the judgement of a licensed practitioner.",
    "",
  ];
  return lines.join("\n");
}
