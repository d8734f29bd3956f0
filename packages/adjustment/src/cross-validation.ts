import { gaugeKey } from "@rainreckon/core";
import {
  type FactorPair,
  factorFromSums,
  type GaugeSum,
  type MeanFieldBiasOptions,
  sumsByGauge,
} from "./mean-field-bias.ts";

/** What the other gauges make of one gauge. */
export interface HeldOutGauge {
  readonly network: string;
  readonly gaugeId: string;
  /** Factor from all other gauges; NaN where their radar sum is 0. */
  readonly factor: number;
  readonly clipped: boolean;
  /** Sums over the gauge's used pairs: what it read, and the radar adjusted without it; mm. */
  readonly gaugeMm: number;
  readonly crossValidatedMm: number;
}

/** Leave-one-gauge-out cross-validation of a mean-field bias. */
export interface CrossValidation<P extends FactorPair> {
  readonly gauges: readonly HeldOutGauge[];
  /**
   * The pairs that were given, the radar depth of used ones multiplied by the factor of the other
   * gauges: what scores after adjustment are worked out on. A pair whose factor is undefined is unused.
   */
  readonly pairs: readonly P[];
  /** Root mean square over gauges of cross-validated minus gauge window depth, mm; NaN without a gauge. */
  readonly errorMm: number;
  /** The same in per cent of the gauges' mean window depth; NaN where that is 0. */
  readonly errorPercent: number;
  /** The same error of the radar as it is, so that the gain of the adjustment can be read. */
  readonly errorBeforeMm: number;
  /** How many gauges the two errors are taken over. */
  readonly gaugeCount: number;
  /** How many held-out factors met a limit. */
  readonly clippedCount: number;
}

/**
 * How well the factor of the other gauges predicts each gauge.
 *
 * A gauge that shaped the field cannot also judge it, so each gauge in turn is left out with all its
 * pairs, and the limits apply to each factor as they do to the one of all gauges. The floors do not: they
 * decide whether there is an adjustment at all.
 *
 * @param pairs - the pairs that the factor was made from
 */
export function crossValidate<P extends FactorPair>(
  pairs: readonly P[],
  { factorLimits }: Pick<MeanFieldBiasOptions, "factorLimits">,
): CrossValidation<P> {
  const sums = sumsByGauge(pairs);
  const heldOut = sums.map((sum, left) => holdOut(sum, sums.toSpliced(left, 1), factorLimits));
  const factors = new Map(heldOut.map((gauge) => [keyOf(gauge), gauge.factor]));
  const judged = sums
    .map((sum, i) => ({ ...sum, crossValidatedMm: heldOut[i].crossValidatedMm }))
    .filter((gauge) => !Number.isNaN(gauge.crossValidatedMm));
  const errorMm = rootMeanSquare(judged.map((gauge) => gauge.crossValidatedMm - gauge.gaugeMm));
  const meanGaugeMm = judged.reduce((sum, gauge) => sum + gauge.gaugeMm, 0) / judged.length;
  return {
    gauges: heldOut,
    pairs: pairs.map((pair) => adjustedByOthers(pair, factors.get(keyOf(pair)))),
    errorMm,
    errorPercent: meanGaugeMm > 0 ? (100 * errorMm) / meanGaugeMm : Number.NaN,
    errorBeforeMm: rootMeanSquare(judged.map((gauge) => gauge.radarMm - gauge.gaugeMm)),
    gaugeCount: judged.length,
    clippedCount: heldOut.filter((gauge) => gauge.clipped).length,
  };
}

function holdOut(
  { network, gaugeId, gaugeMm, radarMm }: GaugeSum,
  others: readonly GaugeSum[],
  limits: MeanFieldBiasOptions["factorLimits"],
): HeldOutGauge {
  const othersGaugeMm = others.reduce((sum, other) => sum + other.gaugeMm, 0);
  const othersRadarMm = others.reduce((sum, other) => sum + other.radarMm, 0);
  const limited = factorFromSums(othersGaugeMm, othersRadarMm, limits);
  const factor = limited?.factor ?? Number.NaN;
  return {
    network,
    gaugeId,
    factor,
    clipped: limited?.clipped ?? false,
    gaugeMm,
    crossValidatedMm: radarMm * factor,
  };
}

function adjustedByOthers<P extends FactorPair>(pair: P, factor: number | undefined): P {
  if (!pair.used || factor === undefined) return pair;
  if (Number.isNaN(factor)) {
    return { ...pair, used: false, reason: "the radar saw no rain at the other gauges: no factor" };
  }
  return { ...pair, radarMm: pair.radarMm * factor };
}

function rootMeanSquare(errors: readonly number[]): number {
  return Math.sqrt(errors.reduce((sum, error) => sum + error * error, 0) / errors.length);
}

function keyOf({ network, gaugeId }: { readonly network: string; readonly gaugeId: string }): string {
  return gaugeKey({ network, id: gaugeId });
}
