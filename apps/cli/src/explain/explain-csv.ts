import { EFFECTS, type Effect } from "@rainreckon/core";
import { type CsvColumn, csvText } from "@rainreckon/formats";
import type { AreaAccount, Explanation, PartAccount, PointAccount, ScanAccount } from "./schema.ts";

/** A stretch of time with the scan it begins with; a scan with which none begins has no part. */
interface PointRow {
  readonly point: PointAccount;
  readonly scan: ScanAccount;
  readonly next: ScanAccount | undefined;
  readonly part: PartAccount | undefined;
  /** Gauge depth of the step, in the step's last row. */
  readonly gaugeMm: number | null;
}

/** Digits that let a plain sum of the rows meet a float32 total. */
const DEPTH_DECIMALS = 15;
const RATE_DECIMALS = 12;

const num = (value: number | null | undefined): number => value ?? Number.NaN;

function text<Row>(name: string, of: (row: Row) => string | null | undefined): CsvColumn<Row> {
  return { kind: "text", name, of: (row) => of(row) ?? undefined };
}

function number<Row>(
  name: string,
  decimals: number,
  of: (row: Row) => number | null | undefined,
): CsvColumn<Row> {
  return { kind: "number", name, decimals, of: (row) => num(of(row)) };
}

/** By gate, in the order of ray_gate; in brackets, so that no spreadsheet takes it for a date or a formula. */
function gates(
  name: string,
  of: (gate: ScanAccount["gates"][number]) => string | number | null,
): CsvColumn<PointRow> {
  return text(name, ({ scan }) => bracketed(scan.gates.map((gate) => of(gate) ?? "none")));
}

function bracketed(values: readonly (string | number)[]): string | undefined {
  return values.length === 0 ? undefined : `[${values.join(" ")}]`;
}

const POINT_COLUMNS: readonly CsvColumn<PointRow>[] = [
  text("place", ({ point }) => point.name),
  text("step_start", ({ part }) => part?.stepStart),
  text("step_end", ({ part }) => part?.stepEnd),
  text("start", ({ part }) => part?.start),
  text("end", ({ part }) => part?.end),
  text("source", ({ scan }) => scan.source),
  text("kind", ({ scan }) => scan.kind),
  text("stretch", ({ part }) => part?.kind),
  text("scan_time", ({ scan }) => scan.time),
  text("file", ({ scan }) => scan.file),
  text("dataset", ({ scan }) => scan.dataset),
  number("elevation_deg", 3, ({ scan }) => scan.elevationDeg),
  number("range_km", 3, ({ scan }) => scan.rangeKm),
  number("beam_height_asl_m", 1, ({ scan }) => scan.beamHeightAslM),
  gates("ray_gate", ({ ray, gate }) => `${ray}/${gate}`),
  gates("stored", ({ stored }) => stored),
  gates(
    "measured_dbz",
    ({ measured, measuredDbz }) => measuredDbz?.toFixed(3) ?? measured.replaceAll(" ", "-"),
  ),
  gates("screened_by", ({ screenedBy }) => screenedBy.join("+") || "none"),
  gates("filled_dbz", ({ filledDbz }) => filledDbz?.toFixed(3) ?? "none"),
  ...EFFECTS.map((effect: Effect) => gates(`${effect}_db`, ({ effectsDb }) => effectsDb[effect].toFixed(3))),
  gates("marks", ({ marks }) => marks.join("+") || "none"),
  gates(
    "dbz",
    ({ dbz, measured }) => dbz?.toFixed(3) ?? (measured === "below detection" ? "below-detection" : "none"),
  ),
  gates("zdr_db", ({ zdrDb }) => zdrDb?.toFixed(3) ?? null),
  gates("rhohv", ({ rhohv }) => rhohv?.toFixed(4) ?? null),
  gates("kdp_deg_per_km", ({ kdpDegPerKm }) => kdpDegPerKm?.toFixed(3) ?? null),
  gates("method", ({ method }) => method ?? "not-observed"),
  gates("relation", ({ relation }) => relation ?? "none"),
  gates("capped", ({ capped }) => (capped ? "yes" : "no")),
  gates("gate_mm_per_hour", ({ rateMmPerHour }) => rateMmPerHour?.toFixed(9) ?? "none"),
  text("grid_quantity", ({ scan }) => scan.gridQuantity),
  text("grid_values", ({ scan }) => bracketed(scan.gridValues.map(({ value }) => value ?? "none"))),
  text("passed_over", ({ scan }) =>
    scan.passedOver.map(({ elevationDeg, why }) => `${elevationDeg} deg: ${why}`).join("; "),
  ),
  number("rate_mm_per_hour", RATE_DECIMALS, ({ scan }) => scan.rateMmPerHour),
  text("next_scan_time", ({ next }) => next?.time),
  text("next_file", ({ next }) => next?.file),
  number("next_rate_mm_per_hour", RATE_DECIMALS, ({ part }) => part?.nextRateMmPerHour),
  number("hours", DEPTH_DECIMALS, ({ part }) => part?.hours),
  number("next_hours", DEPTH_DECIMALS, ({ part }) => part?.nextHours),
  number("share", DEPTH_DECIMALS, ({ part }) => part?.share),
  number("depth_mm", DEPTH_DECIMALS, ({ part }) => part?.depthMm),
  number("running_total_mm", 6, ({ part }) => part?.runningMm),
  number("gauge_mm", 3, ({ gaugeMm }) => gaugeMm),
];

function* pointRows(point: PointAccount): Generator<PointRow> {
  const scanOf = new Map(point.scans.map((scan) => [scan.number, scan]));
  const silent = new Set(scanOf.keys());
  const gaugeOf = new Map(point.steps.map(({ end, gaugeMm }) => [end, gaugeMm]));
  for (const [k, part] of point.parts.entries()) {
    silent.delete(part.scan);
    const isLast = point.parts[k + 1]?.stepEnd !== part.stepEnd;
    const scan = scanOf.get(part.scan) as ScanAccount;
    const gaugeMm = isLast ? (gaugeOf.get(part.stepEnd) ?? null) : null;
    yield { point, scan, next: scanOf.get(part.nextScan), part, gaugeMm };
  }
  for (const scan of point.scans) {
    if (silent.has(scan.number)) yield { point, scan, next: undefined, part: undefined, gaugeMm: null };
  }
}

interface AreaRow {
  readonly area: AreaAccount;
  readonly scan?: AreaAccount["scans"][number];
  readonly step?: AreaAccount["steps"][number];
}

const AREA_COLUMNS: readonly CsvColumn<AreaRow>[] = [
  text("catchment_id", ({ area }) => area.id),
  text("row", ({ scan }) => (scan === undefined ? "step" : "scan")),
  text("start", ({ step }) => step?.start),
  text("end", ({ step, scan }) => step?.end ?? scan?.time),
  text("source", ({ scan }) => scan?.source),
  text("kind", ({ scan }) => scan?.kind),
  text("files", ({ scan }) => scan?.files.join(" ")),
  text("elevations_deg", ({ scan }) => scan?.elevationsDeg.join(" ")),
  number("observed_fraction", 6, ({ scan, step }) => scan?.observedShare ?? step?.observedFraction),
  number("screened_fraction", 6, ({ scan }) => scan?.screenedShare),
  number("mean_rate_mm_per_hour", RATE_DECIMALS, ({ scan }) => scan?.meanRateMmPerHour),
  number("screened_mm_per_hour", 6, ({ scan }) => scan?.screenedMmPerHour),
  number("capped_fraction", 6, ({ scan }) => scan?.cappedShare),
  number("filled_fraction", 6, ({ scan }) => scan?.filledShare),
  number("blockage_db", 3, ({ scan }) => scan?.correctionsDb.blockage),
  number("gas_db", 3, ({ scan }) => scan?.correctionsDb.gas),
  number("attenuation_db", 3, ({ scan }) => scan?.correctionsDb.attenuation),
  number("profile_db", 3, ({ scan }) => scan?.correctionsDb.profile),
  number("beam_height_asl_m", 1, ({ scan }) => scan?.meanBeamHeightAslM),
  number("radar_mm", DEPTH_DECIMALS, ({ step }) => step?.radarMm),
  number("adjusted_mm", 6, ({ step }) => step?.adjustedMm),
  text("shares", ({ step }) =>
    step === undefined
      ? undefined
      : Object.entries(step.shares)
          .map(([id, share]) => `${id} ${share.toFixed(4)}`)
          .join("; "),
  ),
  number("running_total_mm", 6, ({ step }) => step?.runningMm),
];

function* areaRows(area: AreaAccount): Generator<AreaRow> {
  for (const scan of area.scans) yield { area, scan };
  for (const step of area.steps) yield { area, step };
}

/** All rows of an account of points, or else of catchments, as one table. */
export function explainCsv({ points, catchments }: Explanation): Promise<string> {
  return points.length > 0
    ? csvText(POINT_COLUMNS, allOf(points, pointRows))
    : csvText(AREA_COLUMNS, allOf(catchments, areaRows));
}

function* allOf<Of, Row>(accounts: readonly Of[], rowsOf: (account: Of) => Iterable<Row>): Generator<Row> {
  for (const account of accounts) yield* rowsOf(account);
}
