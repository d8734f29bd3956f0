import type { ScoreInterval } from "@rainreckon/core";
import type { Evaluator } from "./evaluator.ts";
import { percentile } from "./percentile.ts";
import { uniformStream } from "./random.ts";

/** Fewest blocks of time, or gauges, that an interval of confidence is drawn from. */
export const MIN_BOOTSTRAP_UNITS = 8;

/** Largest share of resamples that may leave a score undefined before its interval does not count. */
const MAX_UNDEFINED_SHARE = 0.05;

/** Settings of a bootstrap, as the plan gives them. */
export interface BootstrapSettings {
  /** A whole number; the same seed gives the same intervals on every machine. */
  readonly seed: number;
  /** Number of resamples, at least 1. */
  readonly samples: number;
  /** Two-sided level of confidence, above 0 and below 1. */
  readonly level: number;
}

/**
 * Adds one circular block to the count of how often each unit occurs: units `start`, `start + 1`, …,
 * going on at unit 0 after the last.
 *
 * @param weights - shape [unitCount], changed in place
 */
export function addCircularBlock(weights: Float64Array, start: number, length: number): void {
  for (let k = 0; k < length; k++) weights[(start + k) % weights.length] += 1;
}

/**
 * Scores of random samples of the same size, drawn from a sample's units in circular blocks.
 *
 * Each resample holds as many units as the sample: whole blocks from random starts, the last one cut
 * short where the block length does not divide the number of units. With blocks of length 1 this is the
 * ordinary bootstrap, for units without an order (gauges).
 *
 * Sources: Efron (1979), Annals of Statistics 7, 1-26; Politis and Romano (1992), A circular
 * block-resampling procedure for stationary data, in Exploring the Limits of Bootstrap, Wiley.
 *
 * @param evaluator - scores for given weights of the units
 * @param unitCount - number of units, at least 1
 * @param blockLength - units in a block, 1 to unitCount
 * @returns by score: shape [samples], NaN where a resample leaves the score undefined
 * @throws RangeError if the block length is outside its range
 */
export function resampledScores<Name extends string>(
  evaluator: Evaluator<Name>,
  unitCount: number,
  blockLength: number,
  { seed, samples }: Pick<BootstrapSettings, "seed" | "samples">,
): Record<Name, Float64Array> {
  if (!(blockLength >= 1 && blockLength <= unitCount)) {
    throw new RangeError(`a block holds 1 to ${unitCount} units, got ${blockLength}`);
  }
  const { names } = evaluator;
  const uniform = uniformStream(seed);
  const weights = new Float64Array(unitCount);
  const out = new Float64Array(names.length);
  const scores = names.map(() => new Float64Array(samples));
  for (let sample = 0; sample < samples; sample++) {
    weights.fill(0);
    for (let drawn = 0; drawn < unitCount; drawn += blockLength) {
      const start = Math.floor(uniform() * unitCount);
      addCircularBlock(weights, start, Math.min(blockLength, unitCount - drawn));
    }
    evaluator.evaluate(weights, out);
    for (let k = 0; k < names.length; k++) scores[k][sample] = out[k];
  }
  return Object.fromEntries(names.map((name, k) => [name, scores[k]])) as Record<Name, Float64Array>;
}

/**
 * Intervals of confidence of scores: type 7 percentiles of {@link resampledScores}.
 *
 * A score undefined in more than 5 % of the resamples has no interval, with the reason.
 */
export function bootstrapIntervals<Name extends string>(
  evaluator: Evaluator<Name>,
  unitCount: number,
  blockLength: number,
  settings: BootstrapSettings,
): Record<Name, ScoreInterval> {
  const scores = resampledScores(evaluator, unitCount, blockLength, settings);
  const entries = evaluator.names.map((name) => [name, limitsOf(scores[name], settings.level)]);
  return Object.fromEntries(entries) as Record<Name, ScoreInterval>;
}

/**
 * Type 7 percentiles of resampled values.
 *
 * @param scores - shape [samples], NaN where a resample leaves the value undefined
 * @returns NaN with the reason where more than 5 % of them do
 */
export function limitsOf(scores: Float64Array, level: number): ScoreInterval {
  // The standard sorts NaN to the end.
  const ascending = scores.slice().sort();
  let definedCount = ascending.length;
  while (definedCount > 0 && Number.isNaN(ascending[definedCount - 1])) definedCount--;
  const defined = ascending.subarray(0, definedCount);
  const undefinedCount = scores.length - definedCount;
  if (undefinedCount > MAX_UNDEFINED_SHARE * scores.length) {
    const reason = `undefined in ${undefinedCount} of ${scores.length} resamples`;
    return { low: Number.NaN, high: Number.NaN, level, reason };
  }
  return {
    low: percentile(defined, (1 - level) / 2),
    high: percentile(defined, (1 + level) / 2),
    level,
  };
}
