import { durationMs } from "@rainreckon/accumulation";
import {
  type CrossValidation,
  dominanceNote,
  type FieldAdjuster,
  fieldAdjuster,
  type LearnedMethod,
  learnMethod,
  METHOD_TITLES,
  type MethodName,
  type MethodSettings,
  meanFieldBias,
  meanRainShare,
  type RainShare,
  radarVariogram,
  type TrustRule,
  type ValidatedChoice,
  validateChoice,
  validateMethod,
  type WindowGauge,
  whyNoGauge,
} from "@rainreckon/adjustment";
import { cellCentre, type Pair } from "@rainreckon/core";
import { geodesicInverse } from "@rainreckon/mosaic";
import type { AssembledRun } from "./assemble.ts";
import type { PreparedRun } from "./prepare.ts";
import type { UnitStore } from "./unit-store.ts";

interface AppliedAdjustment {
  readonly applied: true;
  readonly method: MethodName;
  /** What people read: "mean-field bias". */
  readonly title: string;
  readonly gaugeCount: number;
  /** The factor gauge/radar where it is one for all places and times; NaN where it is not. */
  readonly factor: number;
  /** For a mean-field bias that met a limit of the plan: what it would have been. */
  readonly unlimitedFactor: number | undefined;
  /** Fallbacks, in words. */
  readonly notes: readonly string[];
  readonly learned: LearnedMethod;
  readonly share: RainShare;
  /** The outer one where the method was chosen: held out were verdicts, choice and learning. Gauge by gauge. */
  readonly crossValidation: CrossValidation;
  /** The same, cluster by cluster. */
  readonly clusterValidation: CrossValidation;
}

/** How a total is adjusted to its gauges, or why it is not. */
export type Adjustment = AppliedAdjustment | { readonly applied: false; readonly reason: string };

/** What adjusting came to. */
export interface AdjustmentResult {
  readonly adjustment: Adjustment;
  /** The gauges that are trusted when all are known. */
  readonly trusted: readonly WindowGauge[];
  /** Undefined where the plan names the method, or nothing could be chosen from. */
  readonly choice: ValidatedChoice | undefined;
  /** Depth by the gauges alone at a place, mm; undefined where they do not allow it. */
  readonly gaugesOnlyMm: ((xKm: number, yKm: number) => number) | undefined;
}

/**
 * Adjusts by the plan's method, or by the one that cross-validation picks.
 *
 * Where gauges are held out, the others are judged anew, as if those were not there.
 *
 * @param pairs - by interval; those of gauges that are not trusted are not used
 * @param all - every gauge with pairs, trusted or not
 * @param trust - which of some of them are to be trusted
 */
export function adjust(
  run: PreparedRun,
  total: AssembledRun,
  pairs: readonly Pair[],
  all: readonly WindowGauge[],
  trust: TrustRule,
): AdjustmentResult {
  const { plan } = run.loaded;
  const { method, minGauges, minGaugeSumMm, factorLimits } = plan.adjustment;
  const gauges = trust(all);
  const refused = (reason: string): AdjustmentResult => ({
    adjustment: { applied: false, reason },
    trusted: gauges,
    choice: undefined,
    gaugesOnlyMm: undefined,
  });
  // The floors are the same for all methods: too few gauges, or too little rain, to say anything by.
  const floors = meanFieldBias(pairs, { minGauges, minGaugeSumMm, factorLimits });
  const placed = run.gauges.gauges.length;
  const noGauge = whyNoGauge({ placed, paired: all.length, trusted: gauges.length });
  if (!floors.applied)
    return refused(method === "none" ? "switched off in the plan" : (noGauge ?? floors.reason));
  const settings = settingsOf(run, total);
  const alone = learnMethod("gauges-alone", gauges, settings);
  const gaugesOnlyMm =
    alone.kind === "field" ? (xKm: number, yKm: number) => alone.depthMm(xKm, yKm, 0, Number.NaN) : undefined;
  if (method === "none") return { ...refused("switched off in the plan"), gaugesOnlyMm };
  const choice = method === "by-cross-validation" ? validateChoice(all, settings, trust) : undefined;
  const name = choice?.chosen ?? (method === "by-cross-validation" ? "mean-field-bias" : method);
  if (name === "none") {
    const reason = "no method met held-out gauges better than the radar as it is";
    return { adjustment: { applied: false, reason }, trusted: gauges, choice, gaugesOnlyMm };
  }
  const learned = learnMethod(name, gauges, settings);
  const { validation, clusterValidation } = choice ?? validateMethod(name, all, settings, trust);
  const dominance = dominanceNote(gauges);
  const byBias = name === "mean-field-bias";
  return {
    adjustment: {
      applied: true,
      method: name,
      title: METHOD_TITLES[name],
      gaugeCount: gauges.length,
      factor: learned.kind === "factor" && learned.constant ? learned.factorAt(0) : Number.NaN,
      unlimitedFactor: byBias && floors.clipped ? floors.unlimitedFactor : undefined,
      notes: dominance === undefined ? learned.notes : [...learned.notes, dominance],
      learned,
      share: meanRainShare(gauges),
      crossValidation: validation,
      clusterValidation,
    },
    trusted: gauges,
    choice,
    gaugesOnlyMm,
  };
}

/** What every method is told beside the gauges. */
export function settingsOf(run: PreparedRun, total: AssembledRun): MethodSettings {
  const { adjustment, pairs } = run.loaded.plan;
  return {
    factorLimits: adjustment.factorLimits,
    thresholdMm: pairs.thresholdMm,
    gaugeErrorShare: adjustment.gaugeErrorPercent / 100,
    shape: adjustment.variogram,
    radarVariogram: radarVariogram(run.grid, total.planes.totalMm, adjustment.variogram),
    window: run.window,
    over: adjustment.over,
    pairIntervalMs: durationMs(pairs.interval),
    kalman: adjustment.kalman,
  };
}

/** What adjusts the intervals of a run; the field is made here, once. */
export function adjusterOf(
  run: PreparedRun,
  total: AssembledRun,
  adjustment: AppliedAdjustment,
): FieldAdjuster {
  return fieldAdjuster(adjustment.learned, {
    grid: run.grid,
    totalMm: total.planes.totalMm,
    rangeKm: (cell) => rangeAt(run, total, cell),
    share: adjustment.share,
  });
}

/** Adjusted depths of the intervals, in time order, from what the units left on disk. */
export function* adjustedIntervals(
  run: PreparedRun,
  total: AssembledRun,
  adjustment: AppliedAdjustment,
  store: UnitStore,
  adjuster: FieldAdjuster = adjusterOf(run, total, adjustment),
): Generator<Float32Array> {
  let k = 0;
  for (const job of run.jobs) {
    for (const { depthMm } of store.load(job).intervals) {
      yield adjuster.interval(run.intervals[k], depthMm);
      k++;
    }
  }
}

/** The adjusted total: the sum in float64 of the adjusted depths of the intervals as they are stored. */
export function sumAdjusted(
  run: PreparedRun,
  total: AssembledRun,
  adjustment: AppliedAdjustment,
  store: UnitStore,
): Float32Array {
  const sum = new Float64Array(run.grid.nx * run.grid.ny).fill(Number.NaN);
  for (const adjusted of adjustedIntervals(run, total, adjustment, store)) {
    for (let cell = 0; cell < sum.length; cell++) {
      const value = adjusted[cell];
      if (Number.isNaN(value)) continue;
      sum[cell] = Number.isNaN(sum[cell]) ? value : sum[cell] + value;
    }
  }
  return Float32Array.from(sum);
}

/** Index of the radar that speaks loudest in a cell; -1 where none does. */
export function loudestRadar(total: AssembledRun, cell: number): number {
  let loudest = -1;
  for (const [r, share] of total.planes.radarShare.entries()) {
    if (share[cell] > (total.planes.radarShare[loudest]?.[cell] ?? 0)) loudest = r;
  }
  return loudest;
}

/** Distance of a cell from the radar that speaks loudest in it, km; NaN where none does. */
export function rangeAt(run: PreparedRun, total: AssembledRun, cell: number): number {
  const site = run.shape.radars[loudestRadar(total, cell)]?.site;
  if (site === undefined) return Number.NaN;
  const { xM, yM } = cellCentre(run.grid, cell);
  const [lonDeg, latDeg] = run.map.inverse(xM, yM);
  return geodesicInverse(site, { lonDeg, latDeg }).distanceM / 1000;
}
