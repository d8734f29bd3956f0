import { displayText } from "@rainreckon/formats";
import { decimals, fixedDecimals } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";
import type { AreaAccount, Explanation } from "./schema.ts";
import { sureLines } from "./sure.ts";
import { adjustmentLines, CHAIN, clockOf, headLines, right } from "./text-words.ts";

/** Rows of scans and of steps that are shown. */
const ROWS_SHOWN = 24;

/** The account of a catchment for people: what its scans showed, its steps, and the row of catchments.csv. */
export function areaText(area: AreaAccount, explanation: Explanation): string {
  const { end, scans, steps } = area;
  const wettest = (count: number) =>
    new Set(
      scans
        .toSorted((a, b) => (b.meanRateMmPerHour ?? 0) - (a.meanRateMmPerHour ?? 0) || a.number - b.number)
        .slice(0, count)
        .concat(scans.slice(0, 1), scans.slice(-1))
        .map(({ number }) => number),
    );
  const shown = scans.length <= ROWS_SHOWN ? wettest(scans.length) : wettest(ROWS_SHOWN - 2);
  const percent = (share: number | null) => (share === null ? "–" : `${decimals(100 * share, 0)} %`);
  const db = (value: number | null) => fixedDecimals(value, 1).replace(/^-(0\.0)$/, "$1");
  const clock = clockOf(explanation);
  const shownSteps =
    steps.length <= ROWS_SHOWN
      ? steps
      : steps
          .toSorted((a, b) => (b.radarMm ?? 0) - (a.radarMm ?? 0))
          .slice(0, ROWS_SHOWN)
          .toSorted((a, b) => (a.end < b.end ? -1 : 1));
  const lines = [
    `${fixedDecimals(end.depthObservedMm, 2)} mm (${end.adjustedMm === null ? "radar, not adjusted" : "adjusted"}) over catchment ${displayText(area.id)}, ${displayText(area.name)}: how it came to be`,
    ...headLines(explanation, end.spanRadarMm),
    `${decimals(area.areaKm2, 1)} km², ${area.cellCount} cells by their share inside; observed ${percent(end.observedFraction)} of area and time`,
    ...CHAIN,
    "",
    `Scans (${scans.length}), UTC: means over the area; corrections in dB are means by rain`,
    textTable(
      [
        right("    #"),
        { head: "time" },
        { head: "source" },
        right("mm/h"),
        right("seen"),
        right("screened"),
        right("filled"),
        right("block"),
        right("gas"),
        right("atten"),
        right("profile"),
        right("at cap"),
      ],
      scans
        .filter(({ number }) => shown.has(number))
        .map((scan) => [
          String(scan.number),
          clock(scan.time),
          scan.kind === "gridded" ? `${scan.source} (gridded)` : scan.source,
          fixedDecimals(scan.meanRateMmPerHour, 3),
          percent(scan.observedShare),
          percent(scan.screenedShare),
          percent(scan.filledShare),
          db(scan.correctionsDb.blockage),
          db(scan.correctionsDb.gas),
          db(scan.correctionsDb.attenuation),
          db(scan.correctionsDb.profile),
          percent(scan.cappedShare),
        ]),
    ),
    ...(shown.size < scans.length
      ? [
          `  … ${scans.length - shown.size} of ${scans.length} scans are left out here: shown are the first, the last and the wettest; --csv and --json hold all`,
        ]
      : []),
    "",
    "Steps, mm, UTC",
    textTable(
      [
        { head: "  to" },
        right("radar"),
        right("stored"),
        right("adjusted"),
        right("observed"),
        right("radar so far"),
      ],
      shownSteps.map((step) => [
        `  ${clock(step.end)}`,
        fixedDecimals(step.radarMm, 3),
        step.storedRadarMm ?? "–",
        fixedDecimals(step.adjustedMm, 3),
        percent(step.observedFraction),
        fixedDecimals(step.runningMm, 3),
      ]),
    ),
    ...(shownSteps.length < steps.length
      ? [
          `  … ${steps.length - shownSteps.length} of ${steps.length} steps are left out here: shown are the wettest`,
        ]
      : []),
    "",
    "The end: the window's row of catchments.csv",
    `  radar ${fixedDecimals(end.radarMm, 3)} mm${end.adjustedMm === null ? "" : `, adjusted ${fixedDecimals(end.adjustedMm, 3)} mm`}; stored ${end.storedDepthObservedMm ?? "–"} mm`,
    ...sureLines(end.sure),
    end.exact
      ? "  The same to the last digit written: the account ends on what is stored."
      : "  NOT THE SAME: this account does not end on what is stored.",
    "",
    ...adjustmentLines(area.adjustment, end.adjustedMm),
  ];
  return lines.join("\n");
}
