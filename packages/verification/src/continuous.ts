import { type DepthPairs, meanOf } from "./conditioning.ts";
import {
  ADDITIVE_SCORES,
  type AdditiveScoreName,
  namesOf,
  RATIO_SCORES,
  type RatioScoreName,
} from "./definitions.ts";
import { type Evaluator, oneUnit, type ScoreValue, type Units, valuesOf } from "./evaluator.ts";
import { decibels, quotient } from "./numbers.ts";
import { medianFinder, rankCorrelator } from "./ranks.ts";

/**
 * Scores of depths, radar against gauge, on pairs that were kept beforehand.
 *
 * Ratios are radar over gauge, errors radar minus gauge. Formulas and sources: `ADDITIVE_SCORES`.
 * Undefined is NaN with the reason: no pair; no gauge rain for what is divided by it; fewer than two
 * pairs, or a constant side, for what needs variation.
 *
 * @param pairs - depths, mm, finite
 * @throws RangeError if the two sides differ in length or hold a value that is not finite
 */
export function additiveScores(pairs: DepthPairs): Record<AdditiveScoreName, ScoreValue> {
  checkDepths(pairs);
  const values = valuesOf(additiveEvaluator(pairs, oneUnit(pairs.gaugeMm.length)), 1);
  return withReasons(values, (name) => whyAdditiveUndefined(name, pairs));
}

/**
 * Scores of the ratio radar/gauge, on pairs where both are above 0. Formulas and sources: `RATIO_SCORES`.
 *
 * @throws RangeError if a depth is not above 0: such a pair has no ratio, and the rule "both" drops it
 */
export function ratioScores(pairs: DepthPairs): Record<RatioScoreName, ScoreValue> {
  checkDepths(pairs);
  const values = valuesOf(ratioEvaluator(pairs, oneUnit(pairs.gaugeMm.length)), 1);
  return withReasons(values, () =>
    pairs.gaugeMm.length === 0 ? "no pair reaches the threshold on both sides" : "needs at least two pairs",
  );
}

// Sums by unit, with depths taken from the sample means so that squares do not cancel.
const N = 0;
const GAUGE = 1;
const RADAR = 2;
const ABSOLUTE = 3;
const SQUARED = 4;
const GAUGE_SQUARED = 5;
const RADAR_SQUARED = 6;
const PRODUCT = 7;
const ERROR_SQUARED = 8;
const SUMS = 9;

/** The same scores for any weights of the units. */
export function additiveEvaluator(pairs: DepthPairs, units: Units): Evaluator<AdditiveScoreName> {
  const { gaugeMm, radarMm } = pairs;
  const { unitOf, unitCount } = units;
  const names = namesOf(ADDITIVE_SCORES);
  const meanGauge = gaugeMm.length === 0 ? 0 : meanOf(gaugeMm);
  const meanRadar = radarMm.length === 0 ? 0 : meanOf(radarMm);
  const byUnit = new Float64Array(unitCount * SUMS);
  for (let i = 0; i < gaugeMm.length; i++) {
    const at = unitOf[i] * SUMS;
    const gauge = gaugeMm[i] - meanGauge;
    const radar = radarMm[i] - meanRadar;
    const error = radarMm[i] - gaugeMm[i];
    byUnit[at + N] += 1;
    byUnit[at + GAUGE] += gauge;
    byUnit[at + RADAR] += radar;
    byUnit[at + ABSOLUTE] += Math.abs(error);
    byUnit[at + SQUARED] += error * error;
    byUnit[at + GAUGE_SQUARED] += gauge * gauge;
    byUnit[at + RADAR_SQUARED] += radar * radar;
    byUnit[at + PRODUCT] += gauge * radar;
    byUnit[at + ERROR_SQUARED] += (radar - gauge) ** 2;
  }
  const spearman = rankCorrelator(gaugeMm, radarMm);
  const pairWeights = new Float64Array(gaugeMm.length);
  const sums = new Float64Array(SUMS);

  return {
    names,
    evaluate(unitWeights, out) {
      sums.fill(0);
      for (let unit = 0; unit < unitCount; unit++) {
        const weight = unitWeights[unit];
        if (weight === 0) continue;
        for (let k = 0; k < SUMS; k++) sums[k] += weight * byUnit[unit * SUMS + k];
      }
      for (let i = 0; i < pairWeights.length; i++) pairWeights[i] = unitWeights[unitOf[i]];
      const scores = additiveFromSums(sums, meanGauge, meanRadar);
      scores.spearmanCorrelation = spearman(pairWeights);
      for (let k = 0; k < names.length; k++) out[k] = scores[names[k]];
    },
  };
}

function additiveFromSums(
  sums: Float64Array,
  gaugeOffset: number,
  radarOffset: number,
): Record<AdditiveScoreName, number> {
  const n = sums[N];
  const sumGauge = sums[GAUGE] + n * gaugeOffset;
  const sumRadar = sums[RADAR] + n * radarOffset;
  const meanGauge = quotient(sumGauge, n);
  const meanRadar = quotient(sumRadar, n);
  const biasRatio = quotient(sumRadar, sumGauge);
  const meanErrorMm = meanRadar - meanGauge;
  const meanSquare = quotient(sums[SQUARED], n);
  const rootMeanSquareErrorMm = Math.sqrt(meanSquare);
  const gaugeSpread = centred(sums[GAUGE_SQUARED], sums[GAUGE], n);
  const radarSpread = centred(sums[RADAR_SQUARED], sums[RADAR], n);
  const errorSpread = centred(sums[ERROR_SQUARED], sums[RADAR] - sums[GAUGE], n);
  const covariation = sums[PRODUCT] - quotient(sums[GAUGE] * sums[RADAR], n);
  const pearsonCorrelation = quotient(covariation, Math.sqrt(gaugeSpread * radarSpread));
  const variationGauge = quotient(Math.sqrt(gaugeSpread), sumGauge);
  const variationRadar = quotient(Math.sqrt(radarSpread), sumRadar);
  const klingGuptaGamma = quotient(variationRadar, variationGauge);
  return {
    biasRatio,
    biasRatioDb: decibels(biasRatio),
    relativeBiasPercent: 100 * quotient(sumRadar - sumGauge, sumGauge),
    meanErrorMm,
    meanAbsoluteErrorMm: quotient(sums[ABSOLUTE], n),
    relativeMeanAbsoluteError: quotient(sums[ABSOLUTE], sumGauge),
    rootMeanSquareErrorMm,
    errorSpreadMm: Math.sqrt(quotient(errorSpread, n)),
    fractionalStandardError: quotient(rootMeanSquareErrorMm, meanGauge),
    pearsonCorrelation,
    spearmanCorrelation: Number.NaN,
    nashSutcliffe: 1 - quotient(sums[SQUARED], gaugeSpread),
    klingGupta2012: 1 - Math.hypot(pearsonCorrelation - 1, biasRatio - 1, klingGuptaGamma - 1),
    klingGuptaBeta: biasRatio,
    klingGuptaGamma,
  };
}

/** Sum of squares about the mean; exactly 0 where what is left is rounding. */
function centred(sumOfSquares: number, sum: number, n: number): number {
  if (n === 0) return 0;
  const about = sumOfSquares - (sum * sum) / n;
  return about <= 1e-12 * sumOfSquares || about <= n * 1e-18 ? 0 : about;
}

const FACTOR_2_DB = decibels(2) + 1e-9;

/** The same scores for any weights of the units. */
export function ratioEvaluator({ gaugeMm, radarMm }: DepthPairs, units: Units): Evaluator<RatioScoreName> {
  const { unitOf, unitCount } = units;
  const names = namesOf(RATIO_SCORES);
  const ratioDb = radarMm.map((radar, i) => decibels(radar / gaugeMm[i]));
  if (ratioDb.some((value) => !Number.isFinite(value))) {
    throw new RangeError("ratio scores need depths above 0 on both sides");
  }
  const offset = ratioDb.length === 0 ? 0 : meanOf(ratioDb);
  const median = medianFinder(ratioDb);
  const byUnit = new Float64Array(unitCount * 4);
  for (let i = 0; i < ratioDb.length; i++) {
    const at = unitOf[i] * 4;
    const db = ratioDb[i] - offset;
    byUnit[at] += 1;
    byUnit[at + 1] += db;
    byUnit[at + 2] += db * db;
    byUnit[at + 3] += Math.abs(ratioDb[i]) <= FACTOR_2_DB ? 1 : 0;
  }
  const pairWeights = new Float64Array(ratioDb.length);
  return {
    names,
    evaluate(unitWeights, out) {
      let n = 0;
      let sum = 0;
      let squared = 0;
      let within = 0;
      for (let unit = 0; unit < unitCount; unit++) {
        const weight = unitWeights[unit];
        n += weight * byUnit[unit * 4];
        sum += weight * byUnit[unit * 4 + 1];
        squared += weight * byUnit[unit * 4 + 2];
        within += weight * byUnit[unit * 4 + 3];
      }
      for (let i = 0; i < pairWeights.length; i++) pairWeights[i] = unitWeights[unitOf[i]];
      const aboutMean = centred(squared, sum, n);
      const meanDb = quotient(sum, n) + offset;
      const meanSquareDb = quotient(aboutMean, n) + meanDb ** 2;
      const scores: Record<RatioScoreName, number> = {
        meanLogRatioDb: meanDb,
        medianLogRatioDb: median(pairWeights),
        logRatioSpreadDb: n < 2 ? Number.NaN : Math.sqrt(aboutMean / (n - 1)),
        rootMeanSquareFactor: 10 ** (Math.sqrt(meanSquareDb) / 10),
        shareWithinFactor2: quotient(within, n),
      };
      for (let k = 0; k < names.length; k++) out[k] = scores[names[k]];
    },
  };
}

/** Why a depth score of these pairs is undefined: asked only where it is. */
export function whyAdditiveUndefined(name: AdditiveScoreName, { gaugeMm, radarMm }: DepthPairs): string {
  if (gaugeMm.length === 0) return "no pair reaches the threshold on either side";
  const needsVariation =
    name === "pearsonCorrelation" ||
    name === "spearmanCorrelation" ||
    name === "nashSutcliffe" ||
    name === "klingGupta2012" ||
    name === "klingGuptaGamma";
  if (needsVariation && gaugeMm.length < 2) return "needs at least two pairs";
  if (gaugeMm.every((depth) => depth === 0)) return "the gauges saw no rain in these pairs";
  if (needsVariation && gaugeMm.every((depth) => depth === gaugeMm[0])) return "all gauge depths are equal";
  if (radarMm.every((depth) => depth === 0)) return "the radar saw no rain in these pairs";
  return "all radar depths are equal";
}

function withReasons<Name extends string>(
  values: Record<Name, number>,
  why: (name: Name) => string,
): Record<Name, ScoreValue> {
  const entries = namesOf(values).map((name) => {
    const value = values[name];
    return [name, Number.isNaN(value) ? { value, reason: why(name) } : { value }];
  });
  return Object.fromEntries(entries) as Record<Name, ScoreValue>;
}

function checkDepths({ gaugeMm, radarMm }: DepthPairs): void {
  if (gaugeMm.length !== radarMm.length) throw new RangeError("gauge and radar depths differ in number");
  for (let i = 0; i < gaugeMm.length; i++) {
    if (!Number.isFinite(gaugeMm[i]) || !Number.isFinite(radarMm[i])) {
      throw new RangeError(`pair ${i} holds a depth that is not finite; leave such pairs out beforehand`);
    }
  }
}
