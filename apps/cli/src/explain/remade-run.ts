import type { Interval } from "@rainreckon/core";
import { adjustedIntervals, sumAdjusted } from "../total/adjust.ts";
import { type Comparison, compareWithGauges } from "../total/against-gauges.ts";
import { type AssembledRun, assemble } from "../total/assemble.ts";
import type { UnitTrace } from "../total/job.ts";
import type { PreparedRun } from "../total/prepare.ts";
import { runUnit } from "../total/run-unit.ts";
import { learnUncertainty, type Uncertainty } from "../total/uncertainty.ts";
import { unitStore } from "../total/unit-store.ts";
import { isoUtc } from "../ui/numbers.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import type { OpenedRun } from "./open-run.ts";

/** A run made again, as far as accounts need it. */
export interface RemadeRun {
  readonly opened: OpenedRun;
  readonly span: Interval;
  readonly total: AssembledRun;
  readonly comparison: Comparison;
  /** Shape [cells]; undefined where there is no adjustment. */
  readonly adjustedTotalMm: Float32Array | undefined;
  readonly uncertainty: Uncertainty;
  /** Shape [intervals][cells]: adjusted depth at some cells, by flat index. */
  readonly adjustedAt: (interval: number, cell: number) => number;
  /** Radar depth of an interval at a cell, as the units leave it. */
  readonly radarAt: (interval: number, cell: number) => number;
  /** What DIR holds, by name of variable. */
  readonly stored: ReadonlyMap<string, Float32Array>;
}

/**
 * Makes a run again, unit by unit, by the code that made it.
 *
 * @param scratch - folder for the results of units
 * @param cells - flat indices of the cells that accounts are asked of
 */
export async function remake(
  opened: OpenedRun,
  span: Interval,
  trace: UnitTrace,
  scratch: string,
  stored: ReadonlyMap<string, Float32Array>,
  terminal: Terminal,
  cells: readonly number[],
): Promise<RemadeRun> {
  const { run } = opened;
  // The headline's other relations have no part in any figure that is accounted for.
  const shape = { ...run.shape, variants: [], headlineCells: new Int32Array() };
  const lean: PreparedRun = { ...run, shape };
  const store = unitStore(scratch);
  const progress = progressBar(terminal, run.jobs.length, "units of work");
  for (const job of run.jobs) {
    store.save(job, await runUnit(shape, job, trace));
    progress.advance();
  }
  progress.end();
  const total = assemble(shape, run.jobs, store, run.window.endEpochMs - run.window.startEpochMs);
  const comparison = compareWithGauges(lean, total);
  const { adjustment } = comparison;
  const place = new Map(cells.map((cell, k) => [cell, k]));
  const at = (rows: readonly Float32Array[]) => (interval: number, cell: number) =>
    rows[interval]?.[place.get(cell) ?? -1] ?? Number.NaN;
  const pick = (field: Float32Array) => Float32Array.from(cells, (cell) => field[cell] as number);
  const radar: Float32Array[] = [];
  for (const job of run.jobs) for (const { depthMm } of store.load(job).intervals) radar.push(pick(depthMm));
  const adjusted: Float32Array[] = [];
  if (adjustment.applied)
    for (const depthMm of adjustedIntervals(lean, total, adjustment, store)) adjusted.push(pick(depthMm));
  const adjustedTotalMm = adjustment.applied ? sumAdjusted(lean, total, adjustment, store) : undefined;
  return {
    opened: { ...opened, run: lean },
    span,
    total,
    comparison,
    adjustedTotalMm,
    uncertainty: learnUncertainty(lean, total, comparison, adjustedTotalMm),
    adjustedAt: at(adjusted),
    radarAt: at(radar),
    stored,
  };
}

/** Both ends in UTC. */
export function spanText({ startEpochMs, endEpochMs }: Interval): { start: string; end: string } {
  return { start: isoUtc(startEpochMs), end: isoUtc(endEpochMs) };
}

/** Whether one interval lies wholly in another. */
export function isInside(inner: Interval, outer: Interval): boolean {
  return inner.startEpochMs >= outer.startEpochMs && inner.endEpochMs <= outer.endEpochMs;
}
