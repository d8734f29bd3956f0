import { gaugeKey, type Pair } from "@rainreckon/core";
import { pairedDepthAt, type RainShare, spanDepthAt } from "./at-gauge.ts";
import type { LearnedMethod } from "./methods.ts";
import type { Trial, Trials } from "./trials.ts";
import type { WindowGauge } from "./window-gauges.ts";

/** What the other gauges make of one gauge. */
export interface HeldOutGauge {
  readonly gauge: WindowGauge;
  /** The method as it learned from gauges without this one. */
  readonly learned: LearnedMethod;
  /** When the rain of the others fell. */
  readonly share: RainShare;
  /** Depth at the gauge by it over the time of its pairs, mm; NaN where there is none. */
  readonly crossValidatedMm: number;
}

/** How well gauges are met by what learned without them. Errors are adjusted minus gauge. */
export interface CrossValidation {
  /** The trusted gauges. */
  readonly gauges: readonly HeldOutGauge[];
  /** Root mean square over judged gauges of the error of depths over the time of their pairs, mm; NaN without a gauge. */
  readonly errorMm: number;
  readonly meanErrorMm: number;
  /** The first in per cent of the gauges' mean depth; NaN where that is 0. */
  readonly errorPercent: number;
  /** The same error of the radar as it is, so that the gain of the adjustment can be read. */
  readonly errorBeforeMm: number;
  /** How many gauges were judged. */
  readonly gaugeCount: number;
  /** How many gauges got no figure; they enter no error. */
  readonly withoutFigure: number;
}

/**
 * Holds out gauges in turn and asks what learned from the rest for their depths: a gauge that shaped the field
 * cannot also judge it, nor say which of the others are to be trusted.
 *
 * @param scored - the gauges to be met: those that are trusted when all are known
 * @param folds - fold of each of them, as `foldsOf` or `clustersOf` gives them
 * @param learn - all that is learned, choices included, must come from the trial it is handed
 */
export function crossValidate(
  trials: Trials,
  scored: readonly WindowGauge[],
  folds: Int32Array,
  learn: (trial: Trial, heldOut: readonly WindowGauge[]) => LearnedMethod,
): CrossValidation {
  const trained = new Map<number, Pick<HeldOutGauge, "learned" | "share">>();
  const gauges = scored.map((gauge, i): HeldOutGauge => {
    let known = trained.get(folds[i]);
    if (known === undefined) {
      const heldOut = scored.filter((_, other) => folds[other] === folds[i]);
      const trial = trials.without(heldOut);
      known = { learned: learn(trial, heldOut), share: trial.share };
      trained.set(folds[i], known);
    }
    return { gauge, ...known, crossValidatedMm: pairedDepthAt(known.learned, gauge) };
  });
  const judged = gauges.filter(({ crossValidatedMm }) => !Number.isNaN(crossValidatedMm));
  const errors = judged.map(({ gauge, crossValidatedMm }) => crossValidatedMm - gauge.gaugeMm);
  const errorMm = rootMeanSquare(errors);
  const meanGaugeMm = mean(judged.map(({ gauge }) => gauge.gaugeMm));
  return {
    gauges,
    errorMm,
    meanErrorMm: mean(errors),
    errorPercent: meanGaugeMm > 0 ? (100 * errorMm) / meanGaugeMm : Number.NaN,
    errorBeforeMm: rootMeanSquare(judged.map(({ gauge }) => gauge.radarPointMm - gauge.gaugeMm)),
    gaugeCount: judged.length,
    withoutFigure: gauges.length - judged.length,
  };
}
/**
 * The pairs with the radar depth of used ones replaced by what the others make of it: what scores after
 * adjustment are worked out on. A pair without a figure is unused, and so is one that took no part.
 */
export function crossValidatedPairs<P extends Pair>(
  pairs: readonly P[],
  { gauges }: Pick<CrossValidation, "gauges">,
): P[] {
  const byKey = new Map(gauges.map((held) => [keyOf(held.gauge), held]));
  return pairs.map((pair) => {
    const held = byKey.get(keyOf(pair));
    if (!pair.used || held === undefined) return pair;
    const radarMm = spanDepthAt(held.learned, held.gauge, pair, pair.radarMm, held.share);
    return Number.isNaN(radarMm)
      ? { ...pair, used: false, reason: "the radar saw no rain at the other gauges: no factor" }
      : { ...pair, radarMm };
  });
}

function keyOf({ network, gaugeId }: { readonly network: string; readonly gaugeId: string }): string {
  return gaugeKey({ network, id: gaugeId });
}

function rootMeanSquare(errors: readonly number[]): number {
  return Math.sqrt(mean(errors.map((error) => error * error)));
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}
