import { changeSteps, cutWindow, durationMs, roundKeepingSum } from "@rainreckon/accumulation";
import { InputError, type Interval } from "@rainreckon/core";
import { type CsvColumn, writeCsv } from "@rainreckon/formats";
import { counted, lengthText } from "../ui/numbers.ts";
import { type FinishedRun, numberOf, tableOf } from "./finished-run.ts";
import type { ExportReport } from "./schema.ts";
import { offsetText, stampText } from "./stamps.ts";
import { writeTarget } from "./target.ts";

const MM_PER_INCH = 25.4;
const HOUR_MS = 3_600_000;
const DAY_MS = 24 * HOUR_MS;

/** Whose depths: those of members are the catchments', as each member has them. */
export type SeriesOf = "catchments" | "assets" | "members";

/** How a model wants its series. */
export interface SeriesAsked {
  readonly file: string;
  readonly replace: boolean;
  readonly of: SeriesOf;
  /** Length of a step; that of the run's series where left out. */
  readonly step?: string;
  readonly as: "depth" | "rate";
  readonly value: "best" | "radar" | "adjusted";
  readonly stamp: "end" | "start";
  readonly offsetMinutes: number;
  /** What stands for a step that was not observed. */
  readonly missing: string;
  readonly units: "mm" | "in";
}

/** The table that holds each, and how a row names its place. */
const TABLES: Readonly<
  Record<
    SeriesOf,
    { readonly file: string; readonly idOf: (row: Readonly<Record<string, string>>) => string }
  >
> = {
  catchments: { file: "catchments.csv", idOf: (row) => row.catchment_id ?? "" },
  assets: { file: "assets.csv", idOf: (row) => row.asset_id ?? "" },
  members: {
    file: "members_catchments.csv",
    idOf: (row) => `${row.catchment_id}_member_${(row.member ?? "").padStart(3, "0")}`,
  },
};

const COLUMN = { best: "depth_mm", radar: "radar_mm", adjusted: "adjusted_mm" } as const;
const DECIMALS = { mm: 3, in: 5 } as const;

/**
 * Writes one row a step and one column a catchment or asset. Every step of the window is there; one that was not observed whole
 * has the code for missing, and so has a first or last step that the window covers in part.
 *
 * @throws InputError (kind "usage") where the run has no such places, or the step fits no day
 */
export async function exportSeries(run: FinishedRun, asked: SeriesAsked): Promise<ExportReport> {
  const steps = stepsOf(run, asked.of);
  const stepMs = durationMs(asked.step ?? stepLength(run, asked.of));
  if (!(DAY_MS % stepMs === 0))
    throw new InputError(
      `${asked.step} does not divide a day`,
      "command line, --step",
      "write a length that fits whole into 24 hours, such as PT15M",
      { kind: "usage" },
    );
  const wanted = wholeSteps(steps, stepMs, asked.offsetMinutes * 60_000);
  const series = [...(await depthsById(run, steps, asked))].map(([id, depthMm]) => ({
    id,
    values: inUnits(changeSteps(steps, depthMm, wanted), asked, stepMs),
  }));
  if (series.length === 0)
    throw new InputError(
      `the run has no depths of ${asked.of}`,
      run.folder,
      `name a file of ${asked.of} in the plan, and run total again`,
      { kind: "usage" },
    );
  const unit = unitName(asked);
  const offset = asked.offsetMinutes === 0 ? "utc" : offsetText(asked.offsetMinutes);
  const columns: CsvColumn<number>[] = [
    {
      kind: "text",
      name: `step_${asked.stamp}_${offset}`,
      of: (k) =>
        stampText(
          asked.stamp === "end" ? wanted[k]!.endEpochMs : wanted[k]!.startEpochMs,
          asked.offsetMinutes,
        ),
    },
    ...series.map(
      ({ id, values }): CsvColumn<number> => ({
        kind: "number",
        name: `${id}_${unit}`,
        decimals: DECIMALS[asked.units],
        missing: asked.missing,
        of: (k) => values[k],
      }),
    ),
  ];
  await writeTarget(asked.file, { run: run.folder, replace: asked.replace }, (draft) =>
    writeCsv(draft, columns, wanted.keys()),
  );
  const missing = series.reduce((sum, { values }) => sum + values.filter(Number.isNaN).length, 0);
  return {
    format: "rainreckon-export-1",
    run: run.folder,
    kind: "series",
    files: [asked.file],
    rows: wanted.length,
    missing,
    says: [
      `${counted(wanted.length, "step")} of ${lengthText(stepMs)}, ${counted(series.length, asked.of === "members" ? "series of a member" : asked.of.slice(0, -1), asked.of === "members" ? "series of members" : asked.of)}, ${asked.as === "rate" ? `mean rate in ${asked.units}/h` : `depth in ${asked.units}`} (${asked.of === "members" ? "" : `${COLUMN[asked.value]} of `}${TABLES[asked.of].file})`,
      `stamped at the ${asked.stamp} of the step, ${asked.offsetMinutes === 0 ? "UTC" : `UTC${offsetText(asked.offsetMinutes)}`}`,
      missing === 0
        ? "no step is missing"
        : `${counted(missing, "value")} not observed: ${asked.missing}, which is no depth`,
    ],
  };
}

/** Members are drawn for the intervals of the maps; places have shorter steps. */
function stepLength({ plan }: FinishedRun, of: SeriesOf): string {
  return of === "members" ? plan.intervals.grids : plan.intervals.series;
}

/** The steps of a table. */
function stepsOf(run: FinishedRun, of: SeriesOf): Interval[] {
  const { window: asked, intervals } = run.plan;
  const window = { startEpochMs: Date.parse(asked.from), endEpochMs: Date.parse(asked.to) };
  const anchor = window.startEpochMs % durationMs(intervals.series);
  return cutWindow(window, durationMs(stepLength(run, of)), anchor);
}

/** Whole steps by the clock of the offset that hold the window: the first and last may reach beyond it. */
function wholeSteps(steps: readonly Interval[], stepMs: number, offsetMs: number): Interval[] {
  const onClock = (epochMs: number, round: (value: number) => number) =>
    round((epochMs + offsetMs) / stepMs) * stepMs - offsetMs;
  const startEpochMs = onClock(steps[0]!.startEpochMs, Math.floor);
  const endEpochMs = onClock(steps.at(-1)!.endEpochMs, Math.ceil);
  return cutWindow({ startEpochMs, endEpochMs }, stepMs, startEpochMs);
}

/** Depths of each catchment, step by step; NaN where the table has none. */
async function depthsById(
  run: FinishedRun,
  steps: readonly Interval[],
  { of, value }: SeriesAsked,
): Promise<ReadonlyMap<string, Float64Array>> {
  const stepAt = new Map(steps.map(({ startEpochMs }, k) => [startEpochMs, k]));
  const { file, idOf } = TABLES[of];
  const column = of === "members" ? "depth_mm" : COLUMN[value];
  const byId = new Map<string, Float64Array>();
  for (const row of await tableOf(run, file)) {
    const id = idOf(row);
    const k = stepAt.get(Date.parse(row.start ?? ""));
    const depths = byId.get(id) ?? new Float64Array(steps.length).fill(Number.NaN);
    byId.set(id, depths);
    if (k !== undefined && Date.parse(row.end ?? "") === steps[k]!.endEpochMs)
      depths[k] = numberOf(row[column]);
  }
  return byId;
}

/** Depths are rounded so that their sum stays; a rate is that depth over the length of its step. */
function inUnits(depthMm: Float64Array, { as, units }: SeriesAsked, stepMs: number): Float64Array {
  const perUnit = units === "in" ? MM_PER_INCH : 1;
  if (as === "rate") return depthMm.map((depth) => (depth / perUnit) * (HOUR_MS / stepMs));
  return roundKeepingSum(
    depthMm.map((depth) => depth / perUnit),
    DECIMALS[units],
  );
}

function unitName({ as, units }: SeriesAsked): string {
  return as === "rate" ? `${units}_per_h` : units;
}
