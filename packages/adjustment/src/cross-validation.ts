import { gaugeKey, type Pair } from "@rainreckon/core";
import { meanRainShare, pairedDepthAt, type RainShare, spanDepthAt } from "./at-gauge.ts";
import type { LearnedMethod } from "./methods.ts";
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
 * Which gauges are held out together: each alone up to a count, else ten groups by turns.
 *
 * @returns fold of each gauge, shape [count]
 */
export function foldsOf(count: number, aloneUpTo: number): Int32Array {
  return Int32Array.from({ length: count }, (_, i) => (count <= aloneUpTo ? i : i % 10));
}

/**
 * Holds out each gauge in turn, or in groups, and asks what learned from the rest for its depth: a gauge that
 * shaped the field cannot also judge it.
 *
 * @param folds - as {@link foldsOf} gives them
 * @param learn - all that is learned, choices included, must come from the gauges it is handed
 */
export function crossValidate(
  gauges: readonly WindowGauge[],
  folds: Int32Array,
  learn: (others: readonly WindowGauge[]) => LearnedMethod,
): CrossValidation {
  const trained = new Map<number, Pick<HeldOutGauge, "learned" | "share">>();
  const heldOut = gauges.map((gauge, i): HeldOutGauge => {
    let known = trained.get(folds[i]);
    if (known === undefined) {
      const others = gauges.filter((_, other) => folds[other] !== folds[i]);
      known = { learned: learn(others), share: meanRainShare(others) };
      trained.set(folds[i], known);
    }
    return { gauge, ...known, crossValidatedMm: pairedDepthAt(known.learned, gauge) };
  });
  const judged = heldOut.filter(({ crossValidatedMm }) => !Number.isNaN(crossValidatedMm));
  const errors = judged.map(({ gauge, crossValidatedMm }) => crossValidatedMm - gauge.gaugeMm);
  const errorMm = rootMeanSquare(errors);
  const meanGaugeMm = mean(judged.map(({ gauge }) => gauge.gaugeMm));
  return {
    gauges: heldOut,
    errorMm,
    meanErrorMm: mean(errors),
    errorPercent: meanGaugeMm > 0 ? (100 * errorMm) / meanGaugeMm : Number.NaN,
    errorBeforeMm: rootMeanSquare(judged.map(({ gauge }) => gauge.radarMm - gauge.gaugeMm)),
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
