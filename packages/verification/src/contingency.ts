import type { ScoreInterval } from "@rainreckon/core";
import type { DepthPairs } from "./conditioning.ts";
import { CONTINGENCY_SCORES, type ContingencyScoreName, namesOf } from "./definitions.ts";
import type { Evaluator, ScoreValue, Units } from "./evaluator.ts";
import { normalQuantile } from "./normal.ts";
import { quotient, reaches } from "./numbers.ts";

/** How often radar and gauge agreed on an event: depth at or above a threshold. */
export interface ContingencyCounts {
  /** Radar yes, gauge yes. */
  readonly hits: number;
  /** Radar yes, gauge no. */
  readonly falseAlarms: number;
  /** Radar no, gauge yes. */
  readonly misses: number;
  /** Radar no, gauge no. */
  readonly correctNegatives: number;
}

/** Counts of the four cases at a threshold, mm, at or above being an event on either side. */
export function contingencyCounts(pairs: DepthPairs, thresholdMm: number): ContingencyCounts {
  const cells = new Float64Array(4);
  for (let i = 0; i < pairs.gaugeMm.length; i++) cells[cellOf(pairs, i, thresholdMm)]++;
  return { hits: cells[0], falseAlarms: cells[1], misses: cells[2], correctNegatives: cells[3] };
}

/**
 * Scores of yes and no from the four counts. Formulas and sources: `CONTINGENCY_SCORES`.
 *
 * 0/0 is NaN with the reason, never 0. The odds ratio is Infinity where no error was made on one side
 * and something was got right. Nothing is added to the counts.
 *
 * @throws RangeError if a count is negative or not finite
 */
export function contingencyScores(counts: ContingencyCounts): Record<ContingencyScoreName, ScoreValue> {
  const { hits, falseAlarms, misses, correctNegatives } = counts;
  if (![hits, falseAlarms, misses, correctNegatives].every((count) => count >= 0 && Number.isFinite(count))) {
    throw new RangeError("counts of a contingency table must be finite and not negative");
  }
  const values = fromCells(hits, falseAlarms, misses, correctNegatives);
  const entries = namesOf(values).map((name) => {
    const value = values[name];
    return [name, Number.isNaN(value) ? { value, reason: whyUndefined(name, counts) } : { value }];
  });
  return Object.fromEntries(entries) as Record<ContingencyScoreName, ScoreValue>;
}

/**
 * Standard errors of scores that have one in closed form; NaN where the score is undefined.
 *
 * POD as a binomial share; PSS from two independent binomials; the logarithm of the odds ratio from the
 * four counts; EDI and SEDI by the delta method with hit and false detection rates as independent
 * binomials. All take the pairs for independent: hours of one storm are not, so the bootstrap over
 * blocks of time is the interval to trust.
 *
 * Source: Stephenson (2000), Weather and Forecasting 15, 221-232 (odds ratio, PSS); delta method.
 */
export function contingencyStandardErrors({
  hits,
  falseAlarms,
  misses,
  correctNegatives,
}: ContingencyCounts) {
  const events = hits + misses;
  const nonEvents = falseAlarms + correctNegatives;
  const h = quotient(hits, events);
  const f = quotient(falseAlarms, nonEvents);
  const varianceH = quotient(h * (1 - h), events);
  const varianceF = quotient(f * (1 - f), nonEvents);
  const oddsVariance = [hits, falseAlarms, misses, correctNegatives].reduce(
    (sum, count) => sum + quotient(1, count),
    0,
  );
  return {
    probabilityOfDetection: Math.sqrt(varianceH),
    peirceSkillScore: Math.sqrt(varianceH + varianceF),
    logOddsRatio: Math.sqrt(oddsVariance),
    extremalDependencyIndex: ediStandardError(h, f, varianceH, varianceF),
    symmetricExtremalDependencyIndex: sediStandardError(h, f, varianceH, varianceF),
  };
}

/**
 * Wilson's score interval of a share, without continuity correction.
 *
 * Source: Wilson (1927), Journal of the American Statistical Association 22, 209-212; compared among
 * seven methods by Newcombe (1998), Statistics in Medicine 17, 857-872.
 *
 * @param count - successes, 0 to `of`
 * @param of - trials; 0 gives NaN limits with the reason
 * @param level - two-sided level of confidence, above 0 and below 1
 */
export function wilsonInterval(count: number, of: number, level: number): ScoreInterval {
  if (of === 0) return { low: Number.NaN, high: Number.NaN, level, reason: "nothing to take a share of" };
  const z = normalQuantile(0.5 + level / 2);
  const share = count / of;
  const centre = share + (z * z) / (2 * of);
  const half = z * Math.sqrt((share * (1 - share)) / of + (z * z) / (4 * of * of));
  const scale = 1 + (z * z) / of;
  // At 0 and at `of` the limit is exact in algebra; rounding must not push it past the end.
  const low = count === 0 ? 0 : (centre - half) / scale;
  const high = count === of ? 1 : (centre + half) / scale;
  return { low, high, level };
}

/** Wilson intervals of the scores that are shares of counts. */
export function contingencyWilson(
  { hits, falseAlarms, misses, correctNegatives }: ContingencyCounts,
  level: number,
): Partial<Record<ContingencyScoreName, ScoreInterval>> {
  const n = hits + falseAlarms + misses + correctNegatives;
  return {
    baseRate: wilsonInterval(hits + misses, n, level),
    proportionCorrect: wilsonInterval(hits + correctNegatives, n, level),
    probabilityOfDetection: wilsonInterval(hits, hits + misses, level),
    falseAlarmRatio: wilsonInterval(falseAlarms, hits + falseAlarms, level),
    probabilityOfFalseDetection: wilsonInterval(falseAlarms, falseAlarms + correctNegatives, level),
    criticalSuccessIndex: wilsonInterval(hits, hits + falseAlarms + misses, level),
  };
}

/** The same scores for any weights of the units. */
export function contingencyEvaluator(
  pairs: DepthPairs,
  thresholdMm: number,
  { unitOf, unitCount }: Units,
): Evaluator<ContingencyScoreName> {
  const names = namesOf(CONTINGENCY_SCORES);
  const byUnit = new Float64Array(unitCount * 4);
  for (let i = 0; i < pairs.gaugeMm.length; i++) byUnit[unitOf[i] * 4 + cellOf(pairs, i, thresholdMm)]++;
  const cells = new Float64Array(4);
  return {
    names,
    evaluate(unitWeights, out) {
      cells.fill(0);
      for (let unit = 0; unit < unitCount; unit++) {
        const weight = unitWeights[unit];
        if (weight === 0) continue;
        for (let k = 0; k < 4; k++) cells[k] += weight * byUnit[unit * 4 + k];
      }
      const scores = fromCells(cells[0], cells[1], cells[2], cells[3]);
      for (let k = 0; k < names.length; k++) out[k] = scores[names[k]];
    },
  };
}

/** Place of a pair in the order hits, false alarms, misses, correct negatives. */
function cellOf({ gaugeMm, radarMm }: DepthPairs, i: number, thresholdMm: number): 0 | 1 | 2 | 3 {
  const gauge = reaches(gaugeMm[i], thresholdMm);
  const radar = reaches(radarMm[i], thresholdMm);
  if (radar) return gauge ? 0 : 1;
  return gauge ? 2 : 3;
}

function fromCells(a: number, b: number, c: number, d: number): Record<ContingencyScoreName, number> {
  const n = a + b + c + d;
  const h = quotient(a, a + c);
  const f = quotient(b, b + d);
  const chanceHits = quotient((a + b) * (a + c), n);
  return {
    baseRate: quotient(a + c, n),
    proportionCorrect: quotient(a + d, n),
    frequencyBias: quotient(a + b, a + c),
    probabilityOfDetection: h,
    falseAlarmRatio: quotient(b, a + b),
    probabilityOfFalseDetection: f,
    criticalSuccessIndex: quotient(a, a + b + c),
    equitableThreatScore: quotient(a - chanceHits, a + b + c - chanceHits),
    heidkeSkillScore: quotient(2 * (a * d - b * c), (a + c) * (c + d) + (a + b) * (b + d)),
    peirceSkillScore: h - f,
    oddsRatio: b * c === 0 && a * d > 0 ? Number.POSITIVE_INFINITY : quotient(a * d, b * c),
    oddsRatioSkillScore: quotient(a * d - b * c, a * d + b * c),
    extremalDependencyIndex: extremalDependency(h, f),
    symmetricExtremalDependencyIndex: symmetricExtremalDependency(h, f),
  };
}

function extremalDependency(h: number, f: number): number {
  if (!(h > 0 && f > 0 && f < 1)) return Number.NaN;
  return (Math.log(f) - Math.log(h)) / (Math.log(f) + Math.log(h));
}

function symmetricExtremalDependency(h: number, f: number): number {
  if (!(h > 0 && h < 1 && f > 0 && f < 1)) return Number.NaN;
  const top = Math.log(f) - Math.log(h) - Math.log1p(-f) + Math.log1p(-h);
  const bottom = Math.log(f) + Math.log(h) + Math.log1p(-f) + Math.log1p(-h);
  return top / bottom;
}

function ediStandardError(h: number, f: number, varianceH: number, varianceF: number): number {
  if (Number.isNaN(extremalDependency(h, f))) return Number.NaN;
  const sum = Math.log(f) + Math.log(h);
  const byH = (-2 * Math.log(f)) / (sum * sum) / h;
  const byF = (2 * Math.log(h)) / (sum * sum) / f;
  return Math.sqrt(byH ** 2 * varianceH + byF ** 2 * varianceF);
}

function sediStandardError(h: number, f: number, varianceH: number, varianceF: number): number {
  if (Number.isNaN(symmetricExtremalDependency(h, f))) return Number.NaN;
  const top = Math.log(f) - Math.log(h) - Math.log1p(-f) + Math.log1p(-h);
  const bottom = Math.log(f) + Math.log(h) + Math.log1p(-f) + Math.log1p(-h);
  const slope = (topSlope: number, bottomSlope: number) =>
    (topSlope * bottom - top * bottomSlope) / (bottom * bottom);
  const byH = slope(-1 / h - 1 / (1 - h), 1 / h - 1 / (1 - h));
  const byF = slope(1 / f + 1 / (1 - f), 1 / f - 1 / (1 - f));
  return Math.sqrt(byH ** 2 * varianceH + byF ** 2 * varianceF);
}

function whyUndefined(name: ContingencyScoreName, counts: ContingencyCounts): string {
  const { hits, falseAlarms, misses, correctNegatives } = counts;
  if (hits + falseAlarms + misses + correctNegatives === 0) return "no pairs";
  const noEvent = hits + misses === 0;
  const noRadarEvent = hits + falseAlarms === 0;
  if (name === "falseAlarmRatio") return "the radar saw no event";
  if (noEvent && noRadarEvent) return "neither radar nor gauge saw an event";
  if (noEvent) return "the gauges saw no event";
  if (falseAlarms + correctNegatives === 0) return "the gauges saw nothing but events";
  const byRates = name === "extremalDependencyIndex" || name === "symmetricExtremalDependencyIndex";
  if (byRates && hits === 0) return "no event was detected: the logarithm has no value";
  if (byRates && falseAlarms === 0) return "there was no false alarm: the logarithm has no value";
  if (byRates && correctNegatives === 0)
    return "every non-event was a false alarm: the logarithm has no value";
  if (byRates) return "every event was detected: the logarithm has no value";
  return "0 divided by 0";
}
