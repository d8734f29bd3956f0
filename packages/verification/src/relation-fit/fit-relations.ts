import type { ScoreInterval } from "@rainreckon/core";
import { mean, sampleCorrelation } from "simple-statistics";
import { type BootstrapSettings, limitsOf } from "../bootstrap.ts";
import { decibels } from "../numbers.ts";
import { percentile } from "../percentile.ts";
import { type Doubt, doubtsOf } from "./fit-doubts.ts";
import { logFits } from "./log-fits.ts";
import { type MatchedValue, matchedLaw, matchProbabilities } from "./probability-matching.ts";
import { drawingOf, type PairUnits, pairWeights } from "./resample-pairs.ts";
import { biasFreeFit, biasFreeLaw, type RelationError, relationError } from "./sum-fits.ts";
import { choosePairs, NO_LAW, type PowerLaw, pickPairs, type ZrPairs } from "./zr-pairs.ts";

/** The ways to fit, in the order in which they are shown. */
export const RELATION_FITS = [
  "rate-on-reflectivity",
  "reflectivity-on-rate",
  "reduced-major-axis",
  "bias-free",
  "fixed-b",
  "probability-matching",
] as const;
export type RelationFitName = (typeof RELATION_FITS)[number];

export interface FitSettings {
  /** What counts as rain, mm/h: above 0. */
  readonly leastRateMmPerHour: number;
  /** Holds the exponent of `fixed-b`, and the reflectivity that stands for the least rate. */
  readonly reference: PowerLaw;
  readonly bootstrap: BootstrapSettings;
}

/** One fit, with what its coefficients may be. */
export interface RelationFit extends PowerLaw {
  readonly name: RelationFitName;
  /** NaN without an interval; that of a b which was given has no width. */
  readonly aInterval: ScoreInterval;
  readonly bInterval: ScoreInterval;
  /** Correlation of log A and b over the resamples; NaN where b is given or there are none. */
  readonly logACorrelation: number;
  /** What the pairs hold best: the reflectivity at their mean log rate, dBZ. */
  readonly pivotDbz: number;
  readonly pivotInterval: ScoreInterval;
  /** On the pairs where either side is wet; in-sample. */
  readonly error: RelationError;
  /** Why there is no law; empty where there is one. */
  readonly reason: string;
}

/** What the pairs cover. NaN where none is wet on both sides. */
export interface PairCover {
  readonly pairCount: number;
  /** Wet on both sides; on either. */
  readonly bothCount: number;
  readonly eitherCount: number;
  /** Of pairs wet on both sides: least, 10 %, median, 90 %, greatest. */
  readonly rateMmPerHour: readonly number[];
  readonly dbz: readonly number[];
  readonly leastDbz: number;
}

export interface FittedRelations {
  readonly cover: PairCover;
  readonly fits: readonly RelationFit[];
  /** Of log Z and log R. */
  readonly correlation: number;
  /** Geometric mean of the rates wet on both sides, mm/h. */
  readonly pivotRateMmPerHour: number;
  /** Of the design of the regression, columns of unit length. */
  readonly conditionIndex: number;
  readonly doubts: readonly Doubt[];
  /** What was drawn for the intervals, or why there are none. */
  readonly drawn: string;
  /** Of the wet ranks: matched quantiles by probability of the wet part. */
  readonly matched: readonly (MatchedValue & { readonly probability: number })[];
  /** Lines of the offered fit: bias-free, or with b fixed where the pairs cannot tell A from b. */
  readonly offered: RelationFitName | undefined;
}

const MATCHED_AT = [0.05, 0.1, 0.25, 0.5, 0.75, 0.9, 0.95, 0.99];
const COVER_AT = [0, 0.1, 0.5, 0.9, 1];
/** Fewest pairs wet on both sides that anything is fitted to. House rule. */
export const MIN_FIT_PAIRS = 10;

/**
 * Fits Z = A R^b to pairs in six ways, with intervals of confidence and what speaks against believing them.
 *
 * Logarithms are fitted on pairs whose both sides reach the least rate, sums on pairs of which either does, and
 * probabilities on all.
 *
 * @param units - what pairs have in common, for the intervals
 * @throws RangeError as `choosePairs`, and where the least rate is not above 0
 */
export function fitRelations(pairs: ZrPairs, units: PairUnits, settings: FitSettings): FittedRelations {
  const { leastRateMmPerHour, reference, bootstrap } = settings;
  if (!(leastRateMmPerHour > 0)) throw new RangeError("the least rate must be above 0");
  const leastDbz = decibels(reference.a * leastRateMmPerHour ** reference.b);
  const { both, either } = choosePairs(pairs, leastRateMmPerHour, leastDbz);
  const wet = pickPairs(pairs, both);
  const sums = pickPairs(pairs, either);
  const matching = matchedLaw(pairs, leastRateMmPerHour);
  const lawsOf = (weights: ArrayLike<number>): PowerLaw[] => {
    if (both.length < MIN_FIT_PAIRS) return RELATION_FITS.map(() => NO_LAW);
    const logs = logFits(wet, picked(weights, both));
    const ofSums = picked(weights, either);
    return [
      logs.rateOnReflectivity,
      logs.reflectivityOnRate,
      logs.reducedMajorAxis,
      biasFreeFit(sums, ofSums),
      biasFreeLaw(sums, reference.b, ofSums),
      matching(weights),
    ];
  };
  const ones = new Float64Array(pairs.dbz.length).fill(1);
  const laws = lawsOf(ones);
  const logRates = Array.from(wet.rateMmPerHour, (rate) => Math.log10(rate));
  const pivotLog = logRates.length === 0 ? Number.NaN : mean(logRates);
  const drawing = drawingOf({
    ...units,
    gaugeOf: Uint32Array.from(both, (i) => units.gaugeOf[i]),
    timeOf: Uint32Array.from(both, (i) => units.timeOf[i]),
  });
  const draws: PowerLaw[][] = RELATION_FITS.map(() => []);
  if (!("reason" in drawing) && both.length >= MIN_FIT_PAIRS) {
    for (const weights of pairWeights(units, drawing, bootstrap)) {
      for (const [k, law] of lawsOf(weights).entries()) draws[k].push(law);
    }
  }
  const why =
    "reason" in drawing ? drawing.reason : `fewer than ${MIN_FIT_PAIRS} pairs are wet on both sides`;
  const fits = RELATION_FITS.map((name, k): RelationFit => {
    const law = laws[k];
    const drawn = draws[k];
    const interval = (quantityOf: (law: PowerLaw) => number): ScoreInterval =>
      drawn.length === 0
        ? { low: Number.NaN, high: Number.NaN, level: bootstrap.level, reason: why }
        : limitsOf(Float64Array.from(drawn, quantityOf), bootstrap.level);
    const pivotOf = ({ a, b }: PowerLaw) => decibels(a) + 10 * b * pivotLog;
    return {
      name,
      ...law,
      aInterval: interval(({ a }) => a),
      bInterval: interval(({ b }) => b),
      logACorrelation: name === "fixed-b" ? Number.NaN : logCorrelation(drawn),
      pivotDbz: pivotOf(law),
      pivotInterval: interval(pivotOf),
      error: relationError(sums, law),
      reason: Number.isNaN(law.b) ? whyNoLaw(name, both.length) : "",
    };
  });
  const conditionIndex = conditionOf(logRates);
  const doubts = doubtsOf(fits, conditionIndex);
  const wanted = doubts.length === 0 ? "bias-free" : "fixed-b";
  return {
    cover: {
      pairCount: pairs.dbz.length,
      bothCount: both.length,
      eitherCount: either.length,
      rateMmPerHour: COVER_AT.map((share) => percentile(wet.rateMmPerHour.slice().sort(), share)),
      dbz: COVER_AT.map((share) => percentile(wet.dbz.slice().sort(), share)),
      leastDbz,
    },
    fits,
    correlation: logFits(wet, new Float64Array(both.length).fill(1)).correlation,
    pivotRateMmPerHour: 10 ** pivotLog,
    conditionIndex,
    doubts,
    drawn: draws[0].length === 0 ? `no intervals: ${why}` : (drawing as { words: string }).words,
    matched: both.length < MIN_FIT_PAIRS ? [] : matchedQuantiles(pairs, leastRateMmPerHour),
    offered: fits.find(({ name, b }) => name === wanted && b > 0)?.name,
  };
}

function picked(weights: ArrayLike<number>, indices: readonly number[]): Float64Array {
  return Float64Array.from(indices, (i) => weights[i]);
}

function logCorrelation(drawn: readonly PowerLaw[]): number {
  const known = drawn.filter(({ b }) => b > 0);
  if (known.length < 2) return Number.NaN;
  return sampleCorrelation(
    known.map(({ a }) => Math.log10(a)),
    known.map(({ b }) => b),
  );
}

/**
 * Condition index of the columns 1 and log R, each scaled to unit length.
 *
 * Source: Belsley, Kuh and Welsch (1980), Regression Diagnostics, Wiley, chapter 3 (from memory).
 */
function conditionOf(logRates: readonly number[]): number {
  const sum = logRates.reduce((total, x) => total + x, 0);
  const square = logRates.reduce((total, x) => total + x * x, 0);
  const cosine = Math.abs(sum) / Math.sqrt(logRates.length * square);
  // Rounding must not turn all-equal rates into a root of less than 0.
  return cosine >= 1 - 1e-12 ? Number.POSITIVE_INFINITY : Math.sqrt((1 + cosine) / (1 - cosine));
}

function whyNoLaw(name: RelationFitName, count: number): string {
  if (count < MIN_FIT_PAIRS) return `${count} pairs are wet on both sides, ${MIN_FIT_PAIRS} are needed`;
  if (name === "bias-free")
    return "the error is smallest at an end of b = 1 to 2.5: these pairs hold no exponent";
  return "the pairs are all alike, or reflectivity does not rise with rain";
}

/** Quantiles of the wet part of both samples: as many of the heaviest reflectivities as there are wet rates. */
function matchedQuantiles({ dbz, rateMmPerHour }: ZrPairs, leastRateMmPerHour: number) {
  const wetRates = rateMmPerHour.filter((rate) => rate >= leastRateMmPerHour);
  const heaviest = dbz
    .slice()
    .sort()
    .subarray(dbz.length - wetRates.length);
  const values = matchProbabilities(heaviest, wetRates, MATCHED_AT);
  return values
    .map((value, k) => ({ ...value, probability: MATCHED_AT[k] }))
    .filter((value) => value.dbz > Number.NEGATIVE_INFINITY);
}
