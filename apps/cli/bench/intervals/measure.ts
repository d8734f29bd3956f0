import {
  fieldAdjuster,
  type LearnedMethod,
  learnMethod,
  meanRainShare,
  pointRange,
  validateMethod,
} from "@rainreckon/adjustment";
import { cellCentre, cellIndexAt } from "@rainreckon/core";
import { settingsOf } from "../../src/total/adjust.ts";
import type { Comparison } from "../../src/total/against-gauges.ts";
import {
  areaRanges,
  cellRange,
  type KnownUncertainty,
  learnUncertainty,
} from "../../src/total/uncertainty.ts";
import type { TrueWorld } from "../ablation/worlds.ts";
import type { GatheredWorld } from "../adjustment/gather.ts";

/** What intervals are held against. */
export const KINDS = ["points", "hours at points", "catchments", "gauges held out"] as const;
export type Kind = (typeof KINDS)[number];
/** Classes of the true depth, from so many mm on. */
export const CLASSES_MM = [2, 5, 10, 20] as const;

/** One truth and the interval that was to hold it. */
export interface Unit {
  readonly kind: Kind;
  readonly truthMm: number;
  readonly lies: "below" | "inside" | "above";
  readonly widthMm: number;
  /** The same by the gauges alone; null where they allow none. */
  readonly aloneWidthMm: number | null;
  readonly gaugeKm: number;
  /** Farther from all other independent units of its kind than errors are alike over, or an area of its own. */
  readonly independent: boolean;
}

export interface Measured {
  /** Why there are no intervals; null where there are. */
  readonly reason: string | null;
  /** What adjusted. */
  readonly chosen: string;
  readonly rangeKm: number;
  readonly typicalSpread: number;
  readonly units: readonly Unit[];
}

export interface Covered extends Measured {
  readonly world: string;
  readonly seed: number;
  readonly method: string;
}

/** Every other cell each way: more of them tell nothing new. */
const EVERY = 2;

/** Holds the intervals of one run against the truth. */
export function measureCoverage(world: TrueWorld, gathered: GatheredWorld): Measured {
  const { run, total, comparison } = gathered;
  const { adjustment } = comparison;
  const chosen = adjustment.applied ? adjustment.method : "none";
  const none = { chosen, rangeKm: 0, typicalSpread: 0, units: [] };
  const own = adjustment.applied ? totalBy(adjustment.learned, gathered) : undefined;
  const uncertainty = learnUncertainty(run, total, comparison, own);
  if (!uncertainty.known) return { ...none, reason: uncertainty.reason };
  const alone = gaugesAlone(gathered);
  const units: Unit[] = [];
  const trusted = adjustment.applied
    ? adjustment.crossValidation.gauges.map(({ gauge }) => gauge)
    : (comparison.choice?.validation.gauges ?? []).map(({ gauge }) => gauge);
  const gaugeCells = new Set(trusted.map(({ xKm, yKm }) => cellIndexAt(run.grid, xKm * 1000, yKm * 1000)));
  const hours = hoursOf(gathered);
  const taken: { xM: number; yM: number }[] = [];
  const add = (
    kind: Kind,
    truthMm: number,
    range: { readonly p10Mm: number; readonly p90Mm: number },
    beside: { readonly p10Mm: number; readonly p90Mm: number } | undefined,
    gaugeKm: number,
    independent: boolean,
  ) => {
    if (!(truthMm >= CLASSES_MM[0]) || Number.isNaN(range.p10Mm)) return;
    units.push({
      kind,
      truthMm,
      lies: truthMm < range.p10Mm ? "below" : truthMm > range.p90Mm ? "above" : "inside",
      widthMm: range.p90Mm - range.p10Mm,
      aloneWidthMm: beside === undefined ? null : beside.p90Mm - beside.p10Mm,
      gaugeKm,
      independent,
    });
  };
  for (let cell = 0; cell < uncertainty.totalMm.length; cell++) {
    const column = cell % run.grid.nx;
    if (column % EVERY !== 0 || ((cell - column) / run.grid.nx) % EVERY !== 0) continue;
    if (gathered.use[cell] === 0 || gaugeCells.has(cell)) continue;
    const truthMm = world.totalMm[cell];
    if (!(truthMm >= CLASSES_MM[0])) continue;
    const { xM, yM } = cellCentre(run.grid, cell);
    const apart = 1000 * uncertainty.model.rangeKm;
    const independent = taken.every((other) => Math.hypot(other.xM - xM, other.yM - yM) > apart);
    if (independent) taken.push({ xM, yM });
    const gaugeKm =
      Math.min(...trusted.map((gauge) => Math.hypot(gauge.xKm * 1000 - xM, gauge.yKm * 1000 - yM))) / 1000;
    add(
      "points",
      truthMm,
      cellRange(uncertainty, cell, uncertainty.totalMm[cell]),
      alone === undefined ? undefined : cellRange(alone, cell, alone.totalMm[cell]),
      gaugeKm,
      independent,
    );
    for (const [k, hour] of hours.entries()) {
      add(
        "hours at points",
        gathered.truthHoursMm[k][cell],
        cellRange(uncertainty, cell, hour[cell], run.intervals[k]),
        undefined,
        gaugeKm,
        independent,
      );
    }
  }
  for (const { cells } of run.catchments) {
    const inside = Array.from(cells.cells.keys()).filter((k) => cells.cells[k] >= 0);
    if (inside.some((k) => gathered.use[cells.cells[k]] === 0)) continue;
    const whole = inside.reduce((sum, k) => sum + cells.fraction[k], 0);
    const truthMm =
      inside.reduce((sum, k) => sum + cells.fraction[k] * world.totalMm[cells.cells[k]], 0) / whole;
    add(
      "catchments",
      truthMm,
      areaRanges(run, uncertainty, cells).window,
      alone === undefined ? undefined : areaRanges(run, alone, cells).window,
      Number.NaN,
      true,
    );
  }
  addHeldOut(gathered, uncertainty, add);
  const { rangeKm, typicalSpread } = uncertainty.model;
  return { reason: null, chosen, rangeKm, typicalSpread, units };
}

/** Gauges that had no part in their figure, with the gauge's own error in the interval: the model learned from them. */
function addHeldOut(
  { run, comparison }: GatheredWorld,
  uncertainty: KnownUncertainty,
  add: (
    kind: Kind,
    truthMm: number,
    range: { readonly p10Mm: number; readonly p90Mm: number },
    beside: undefined,
    gaugeKm: number,
    independent: boolean,
  ) => void,
): void {
  const { adjustment } = comparison;
  if (!adjustment.applied) return;
  for (const { gauge, crossValidatedMm } of adjustment.crossValidation.gauges) {
    const cell = cellIndexAt(run.grid, gauge.xKm * 1000, gauge.yKm * 1000);
    const { medianLogError } = uncertainty.model;
    const spread = Math.hypot(uncertainty.logSpread[cell] ?? Number.NaN, 0.1 / gauge.gaugeMm);
    add(
      "gauges held out",
      gauge.gaugeMm,
      pointRange(crossValidatedMm, medianLogError, spread),
      undefined,
      0,
      true,
    );
  }
}

/** The error model of ordinary kriging of the gauges alone, learned in the same way from the same gauges. */
function gaugesAlone(gathered: GatheredWorld): KnownUncertainty | undefined {
  const { run, total, comparison } = gathered;
  const { adjustment, trusted } = comparison;
  if (!adjustment.applied) return undefined;
  const settings = settingsOf(run, total);
  const learned = learnMethod("gauges-alone", trusted, settings);
  const { validation } = validateMethod("gauges-alone", trusted, settings);
  const beside: Comparison = {
    ...comparison,
    adjustment: { ...adjustment, method: "gauges-alone", learned, crossValidation: validation },
  };
  const uncertainty = learnUncertainty(run, total, beside, totalBy(learned, gathered));
  return uncertainty.known ? uncertainty : undefined;
}

/** Depth of the window as a method makes it. */
function totalBy(learned: LearnedMethod, gathered: GatheredWorld): Float32Array {
  const sum = new Float32Array(gathered.total.planes.totalMm.length);
  for (const hour of hoursBy(learned, gathered))
    for (let cell = 0; cell < sum.length; cell++) sum[cell] += hour[cell];
  return sum;
}

/** Depth of the intervals to use. */
function hoursOf(gathered: GatheredWorld): readonly Float32Array[] {
  const { adjustment } = gathered.comparison;
  return adjustment.applied ? hoursBy(adjustment.learned, gathered) : gathered.hoursMm;
}

function hoursBy(learned: LearnedMethod, gathered: GatheredWorld): Float32Array[] {
  const { run, total, comparison, rangeKm, hoursMm } = gathered;
  const adjuster = fieldAdjuster(learned, {
    grid: run.grid,
    totalMm: total.planes.totalMm,
    rangeKm: (cell) => rangeKm[cell],
    share: comparison.adjustment.applied ? comparison.adjustment.share : meanRainShare([]),
  });
  return hoursMm.map((radarMm, k) => adjuster.interval(run.intervals[k], radarMm));
}
