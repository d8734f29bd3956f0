import { displayText } from "@rainreckon/formats";
import type { Manifest } from "../manifest.ts";
import { counted, countText, depthText, fixedDecimals, localText, utcText } from "../ui/numbers.ts";
import type { Terminal } from "../ui/terminal.ts";
import type { TotalOutcome } from "./run-total.ts";

/** A correction smaller than this on the mean is not worth a word on the terminal. */
const LEAST_SHOWN_DB = 0.05;

/** What a run tells people on the terminal: the headline, how far to trust it, and where the rest is. */
export function totalText(outcome: TotalOutcome, folder: string, terminal: Terminal): string {
  const { run } = outcome;
  if (outcome.kind === "already there") {
    return `${displayText(folder)} holds this run already, finished and unchanged: nothing was done.`;
  }
  if (outcome.kind === "dry run") {
    const { hours, scanFiles, rounds, gauges, catchments, units, memoryMb, diskMb, membersMb, minutes } =
      outcome.estimate;
    return [
      `This run would take about ${counted(minutes, "minute")} on one core, ${countText(memoryMb)} MB of memory and ${countText(diskMb)} MB of disk:`,
      `  ${hours} h, ${counted(scanFiles, "scan file")}, ${counted(rounds, "round")} in ${counted(units, "unit")} of work`,
      `  ${counted(gauges, "gauge")}, ${counted(catchments, "catchment")}, ${run.grid.nx} × ${run.grid.ny} cells of ${run.grid.cellM} m`,
      ...(membersMb === 0 ? [] : [`  members: up to ${countText(membersMb)} MB of disk beside that`]),
      "Nothing was written.",
    ].join("\n");
  }
  const { headline, counts } = outcome.manifest;
  const { minObserved } = run.loaded.plan.rain;
  const observed = Number(headline.observedFraction);
  const atLeast = observed < minObserved ? "at least " : "";
  const basis = headline.districtAdjustedMm === null ? "radar alone" : "radar adjusted to gauges";
  const { startEpochMs, endEpochMs } = run.window;
  const zone = run.loaded.plan.window.zone;
  const local =
    zone === "UTC" ? "" : `\n  ${localText(startEpochMs, zone)} to ${localText(endEpochMs, zone)}`;
  const place = run.catchments.length > 0 ? "all catchments together" : "the whole map";
  const minutesSeen = Math.round((observed * (endEpochMs - startEpochMs)) / 6000) / 10;
  const minutes = Math.round((endEpochMs - startEpochMs) / 60_000);
  const catchments = headline.catchments as (Bounds & {
    readonly name: string;
    readonly mm: number | null;
    readonly observedFraction: number;
  })[];
  const width = Math.max(0, ...catchments.map(({ name }) => displayText(name).length));
  const error =
    headline.crossValidatedErrorMm === null
      ? ""
      : `; error at gauges left out in turn ${fixedDecimals(headline.crossValidatedErrorMm as number, 1)} mm (${fixedDecimals(headline.crossValidatedErrorPercent as number, 0)} %)`;
  const relations = headline.underRelations as { name: string; mm: number | null }[];
  const factor =
    headline.factorGaugeOverRadar === null
      ? ""
      : ` ${fixedDecimals(headline.factorGaugeOverRadar as number, 2)} (gauge/radar)`;
  return [
    terminal.strong(displayText(run.loaded.plan.title)),
    `  ${utcText(startEpochMs)} to ${utcText(endEpochMs)}${local}`,
    "",
    terminal.strong(
      headline.districtMm === null
        ? `no depth: nothing of ${place} was observed`
        : `${atLeast}${depthText(headline.districtMm as number)} mm${atLeast === "" ? boundsText(headline as unknown as Bounds) : ""} over ${place} (${basis})`,
    ),
    `  observed ${minutesSeen} of ${minutes} minutes on average (${fixedDecimals(100 * observed, 0)} %)`,
    ...catchments.map(
      ({ name, mm, observedFraction, ...bounds }) =>
        `  ${displayText(name).padEnd(width)}  ${observedFraction < minObserved ? "≥" : " "}${depthText(mm).padStart(6)} mm${observedFraction < minObserved ? "" : boundsText(bounds)}`,
    ),
    "",
    counts.gauges === 0
      ? "gauges: none"
      : `gauges: ${counts.gaugesUsed} used, ${counts.gaugesDoubted} doubted, of ${counts.gauges}`,
    headline.adjustmentMethod === null
      ? `not adjusted: ${headline.adjustmentReason}`
      : `${headline.adjustmentMethod}${factor}${error}`,
    ...echoLine(outcome.manifest),
    `${headline.adjustmentMethod === null ? "" : "before adjustment, "}under published relations: ${relations.map(({ name, mm }) => `${name} ${depthText(mm)} mm`).join(", ")}`,
    "",
    ...(headline.cautions as string[]).slice(0, 3).map((caution) => `! ${caution}`),
    "",
    `report: ${displayText(folder)}/report.html`,
    ...(outcome.resumedUnits > 0
      ? [`(${counted(outcome.resumedUnits, "unit")} of work was there from before)`]
      : []),
  ].join("\n");
}

/** Bounds of a headline figure; null where nothing tells. */
interface Bounds {
  readonly p10Mm: number | null;
  readonly p90Mm: number | null;
}

/** Eight chances in ten lie between p10 and p90. */
function boundsText({ p10Mm, p90Mm }: Bounds): string {
  if (p10Mm === null || p90Mm === null) return "";
  return ` (p10–p90 ${depthText(p10Mm)}–${depthText(p90Mm)})`;
}

/** What was done to the echo, in one line; nothing where nothing was. */
function echoLine({ echo }: Manifest): string[] {
  if (echo === null) return [];
  const screenedMm = echo.screens.reduce((sum, { districtMm }) => sum + districtMm, 0);
  const corrections = echo.corrections
    .filter(({ meanDb }) => Math.abs(meanDb) >= LEAST_SHOWN_DB)
    .map(
      ({ correction, meanDb }) =>
        `${correction} ${meanDb > 0 ? "+" : "\u2212"}${fixedDecimals(Math.abs(meanDb), 1)} dB`,
    );
  return [
    `echo: ${depthText(screenedMm)} mm taken for no rain; ${corrections.length === 0 ? "nothing corrected" : `corrected on average for ${corrections.join(", ")}`}`,
  ];
}
