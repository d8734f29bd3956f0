import { gaugeKey, type Pair } from "@rainreckon/core";
import { decibels, quotient, ratioStandardError } from "@rainreckon/verification";

/** What a factor needs of a pair. */
export type FactorPair = Pick<Pair, "network" | "gaugeId" | "gaugeMm" | "radarMm" | "used" | "reason">;

/** Rules of a mean-field bias, as the plan gives them. */
export interface MeanFieldBiasOptions {
  /** Fewest gauges with usable pairs. */
  readonly minGauges: number;
  /** Smallest summed depth of those gauges, mm. */
  readonly minGaugeSumMm: number;
  /** Smallest and largest factor that is applied; the factor is clipped to them, and that is said. */
  readonly factorLimits: readonly [low: number, high: number];
}

/** One factor, and what became of it at the limits. */
export interface LimitedFactor {
  /** What radar depths are multiplied by: gauge/radar. */
  readonly factor: number;
  /** The same before the limits. */
  readonly unlimitedFactor: number;
  readonly clipped: boolean;
}

/** What a factor was, or would have been, made of. */
export interface FactorBasis {
  readonly gaugeCount: number;
  readonly pairCount: number;
  /** Sums over the used pairs of those gauges, mm. */
  readonly gaugeSumMm: number;
  readonly radarSumMm: number;
}

/** A mean-field bias that may be applied. */
export interface AppliedBias extends FactorBasis, LimitedFactor {
  readonly applied: true;
  /** 10 log10 of the factor; positive: radar was too dry. */
  readonly factorDb: number;
  /** Standard errors of the unlimited factor, gauges taken as independent. */
  readonly standardErrorLinearised: number;
  readonly standardErrorJackknife: number;
}

/** No adjustment, and why. */
export interface RefusedBias extends FactorBasis {
  readonly applied: false;
  readonly reason: string;
}

export type MeanFieldBias = AppliedBias | RefusedBias;

/**
 * A factor gauge/radar from sums, within limits.
 *
 * @returns undefined where the radar sum is not above 0: nothing to multiply
 * @throws RangeError if the limits are not positive or out of order
 */
export function factorFromSums(
  gaugeSumMm: number,
  radarSumMm: number,
  [low, high]: readonly [low: number, high: number],
): LimitedFactor | undefined {
  if (!(low > 0 && high >= low))
    throw new RangeError(`factor limits must be positive and in order, got ${low}, ${high}`);
  if (!(radarSumMm > 0)) return undefined;
  const unlimitedFactor = quotient(gaugeSumMm, radarSumMm);
  const factor = Math.min(high, Math.max(low, unlimitedFactor));
  return { factor, unlimitedFactor, clipped: factor !== unlimitedFactor };
}

/** Depths of one gauge, summed over its used pairs. */
export interface GaugeSum {
  readonly network: string;
  readonly gaugeId: string;
  readonly gaugeMm: number;
  readonly radarMm: number;
  readonly pairCount: number;
}

/** Sums by gauge over used pairs, in the order in which gauges first appear. */
export function sumsByGauge(pairs: readonly FactorPair[]): GaugeSum[] {
  const sums = new Map<string, GaugeSum>();
  for (const pair of pairs) {
    if (!pair.used) continue;
    const key = gaugeKey({ network: pair.network, id: pair.gaugeId });
    const before = sums.get(key);
    sums.set(key, {
      network: pair.network,
      gaugeId: pair.gaugeId,
      gaugeMm: (before?.gaugeMm ?? 0) + pair.gaugeMm,
      radarMm: (before?.radarMm ?? 0) + pair.radarMm,
      pairCount: (before?.pairCount ?? 0) + 1,
    });
  }
  return [...sums.values()];
}

/**
 * Mean-field bias: one factor for the whole field and the whole window, the ratio of sums gauge/radar.
 *
 * It is constant in time, so adjusted depths have no step at the hour. Its floors are those of every
 * method: where it refuses, nothing is adjusted. Only used pairs count, so doubted and left-out gauges must have been taken out beforehand.
 * No factor below the floors, or where gauges or radar saw no rain in the pairs; then the reason stands
 * in its place and no copy of the unadjusted field may pass for an adjusted one.
 *
 * The ratio of sums is used rather than the mean of gauge ratios of Brandes (1975), Journal of Applied
 * Meteorology 14, 1339-1345: light rain and single tips then weigh little.
 *
 * @param pairs - pairs of any intervals of the window; each time of each gauge in one pair only
 */
export function meanFieldBias(pairs: readonly FactorPair[], options: MeanFieldBiasOptions): MeanFieldBias {
  const sums = sumsByGauge(pairs);
  const gauges = sums.map((sum) => sum.gaugeMm);
  const radars = sums.map((sum) => sum.radarMm);
  const basis: FactorBasis = {
    gaugeCount: sums.length,
    pairCount: sums.reduce((count, sum) => count + sum.pairCount, 0),
    gaugeSumMm: gauges.reduce((sum, depth) => sum + depth, 0),
    radarSumMm: radars.reduce((sum, depth) => sum + depth, 0),
  };
  const refused = (reason: string): RefusedBias => ({ applied: false, reason, ...basis });
  if (basis.gaugeCount < options.minGauges) {
    return refused(`${basis.gaugeCount} trusted gauges with usable pairs, ${options.minGauges} needed`);
  }
  // A hair of slack: sums of tips are not exact in binary.
  if (basis.gaugeSumMm < options.minGaugeSumMm - 1e-9) {
    return refused(
      `${basis.gaugeSumMm.toFixed(1)} mm summed over the gauges, ${options.minGaugeSumMm} mm needed`,
    );
  }
  const limited = factorFromSums(basis.gaugeSumMm, basis.radarSumMm, options.factorLimits);
  if (limited === undefined) return refused("the radar saw no rain at the gauges: nothing to multiply");
  const errors = ratioStandardError(gauges, radars);
  return {
    applied: true,
    ...basis,
    ...limited,
    factorDb: decibels(limited.factor),
    standardErrorLinearised: errors.linearised,
    standardErrorJackknife: errors.jackknife,
  };
}
