import type { ScoreInterval } from "@rainreckon/core";
import { addCircularBlock, type BootstrapSettings, limitsOf, MIN_BOOTSTRAP_UNITS } from "../bootstrap.ts";
import { quotient, reaches } from "../numbers.ts";
import { uniformStream } from "../random.ts";

/** One way from reflectivity to rain, and the depths that it gives. */
export interface RankCandidate {
  readonly name: string;
  /** Shape [pairs], mm; never NaN. */
  readonly radarMm: Float64Array;
}

export interface RankInput {
  /** Shape [pairs], mm; never NaN. */
  readonly gaugeMm: Float64Array;
  /** Shape [pairs]: 0 to gaugeCount - 1. */
  readonly gaugeOf: Uint32Array;
  readonly gaugeCount: number;
  readonly candidates: readonly RankCandidate[];
  /** Names that win where gauges tell no difference, the first of them first. */
  readonly preferred: readonly string[];
  /** A pair takes part where the gauge, or any candidate, reaches it, mm. */
  readonly thresholdMm: number;
  readonly bootstrap: BootstrapSettings;
}

/** With the depths as they are, or times the gauges' factor, which each gauge is left out of. */
export type RankMode = "alone" | "after bias";

export interface RankedRelation {
  readonly name: string;
  /** Sum radar / sum gauge of the depths as judged. */
  readonly biasRatio: number;
  /** Root mean square of the errors of pair depths, mm, and over the mean gauge depth, per cent. */
  readonly errorMm: number;
  readonly errorPercent: number;
  /** Root mean square of the errors of the window sums at gauges, mm. */
  readonly sumErrorMm: number;
  /** errorMm minus that of the best, with its interval. */
  readonly moreThanBestMm: number;
  readonly interval: ScoreInterval;
  /** Whether the gauges tell it from the best: the whole interval lies above 2 % of the best error. */
  readonly toldApart: boolean;
}

export interface Ranking {
  readonly mode: RankMode;
  /** The smallest error first. */
  readonly relations: readonly RankedRelation[];
  readonly best: string;
  readonly chosen: string;
  /** Error at gauges that had no part in the choice, mm; and how often each was chosen. */
  readonly choiceErrorMm: number;
  readonly chosenInFolds: ReadonlyMap<string, number>;
}

export interface RelationRanks {
  readonly pairCount: number;
  readonly gaugeCount: number;
  readonly meanGaugeMm: number;
  readonly alone: Ranking;
  readonly afterBias: Ranking;
}

/** The rule of the choice in words, for people. */
export const RANK_RULE =
  "the smallest root mean square error of pair depths at held-out gauges; of those that are not worse by more than 2 % " +
  "and chance, the plan's, then the default, else the smallest error";

/** What is within this share of the best error is as good, however sure the difference. House rule. */
const AS_GOOD_WITHIN = 0.02;

/** Up to so many gauges each stands outside the choice alone; beyond, in as many groups. */
const MOST_FOLDS = 30;

/** Sums of products of one candidate, gauge by gauge: all that any error is made of. Shapes [gauges]. */
interface Moments {
  readonly name: string;
  readonly r: Float64Array;
  readonly g: Float64Array;
  readonly rr: Float64Array;
  readonly rg: Float64Array;
  readonly gg: Float64Array;
  readonly n: Float64Array;
}

/**
 * Ranks ways from reflectivity to rain by how they meet gauges, as they are and after each one's own mean-field bias.
 *
 * The bias of a gauge's depths is the factor Σ gauge / Σ radar of the other gauges. Whether a difference from the best
 * is more than chance is told by drawing gauges with all their pairs, the same for both: Hamill (1999), Hypothesis
 * tests for evaluating numerical precipitation forecasts, Weather and Forecasting 14, 155-167, for resampling
 * differences of paired errors; Efron (1979) for the draw. The best was picked by the same gauges, so a difference
 * from it looks rather too large; the error of the choice is therefore found at gauges that had no part in it.
 *
 * @throws RangeError without candidates or pairs, or where names are not unique
 */
export function rankRelations(input: RankInput): RelationRanks {
  const { gaugeMm, gaugeOf, candidates, thresholdMm } = input;
  if (candidates.length === 0) throw new RangeError("there is nothing to rank");
  if (new Set(candidates.map(({ name }) => name)).size !== candidates.length) {
    throw new RangeError("two candidates have one name");
  }
  const pairs = [...gaugeMm.keys()].filter(
    (i) =>
      reaches(gaugeMm[i], thresholdMm) || candidates.some(({ radarMm }) => reaches(radarMm[i], thresholdMm)),
  );
  if (pairs.length === 0) throw new RangeError("no pair reaches the threshold");
  const moments = candidates.map((candidate) => momentsOf(candidate, pairs, input));
  const gauges = [...new Set(pairs.map((i) => gaugeOf[i]))].sort((a, b) => a - b);
  const ranking = (mode: RankMode) => rank(moments, gauges, mode, input);
  return {
    pairCount: pairs.length,
    gaugeCount: gauges.length,
    meanGaugeMm: pairs.reduce((sum, i) => sum + gaugeMm[i], 0) / pairs.length,
    alone: ranking("alone"),
    afterBias: ranking("after bias"),
  };
}

function momentsOf({ name, radarMm }: RankCandidate, pairs: readonly number[], input: RankInput): Moments {
  const zeros = () => new Float64Array(input.gaugeCount);
  const moments = { name, r: zeros(), g: zeros(), rr: zeros(), rg: zeros(), gg: zeros(), n: zeros() };
  for (const i of pairs) {
    const at = input.gaugeOf[i];
    const [r, g] = [radarMm[i], input.gaugeMm[i]];
    moments.r[at] += r;
    moments.g[at] += g;
    moments.rr[at] += r * r;
    moments.rg[at] += r * g;
    moments.gg[at] += g * g;
    moments.n[at] += 1;
  }
  return moments;
}

/** Errors of one candidate at some gauges. Shapes as the gauges asked for. */
interface Errors {
  readonly name: string;
  readonly factor: readonly number[];
  readonly square: readonly number[];
}

/** Each gauge's squared error, by the factor of the gauges that `known` holds without it. */
function errorsAt(
  moments: Moments,
  asked: readonly number[],
  known: readonly number[],
  mode: RankMode,
): Errors {
  const { name, r, g, rr, rg, gg } = moments;
  const total = (values: Float64Array) => known.reduce((sum, at) => sum + values[at], 0);
  const [sumR, sumG] = [total(r), total(g)];
  const isKnown = new Set(known);
  const factor = asked.map((at) => {
    if (mode === "alone") return 1;
    const own = isKnown.has(at) ? 1 : 0;
    return quotient(sumG - own * g[at], sumR - own * r[at]);
  });
  // Rounding must not leave an error of less than 0.
  const square = asked.map((at, k) => Math.max(0, factor[k] ** 2 * rr[at] - 2 * factor[k] * rg[at] + gg[at]));
  return { name, factor, square };
}

function rootMean(squares: readonly number[], counts: readonly number[], weights?: Float64Array): number {
  let square = 0;
  let count = 0;
  for (let k = 0; k < squares.length; k++) {
    const weight = weights === undefined ? 1 : weights[k];
    // An undefined error of a gauge that was not drawn must not spoil those that were.
    if (weight === 0) continue;
    square += weight * squares[k];
    count += weight * counts[k];
  }
  return Math.sqrt(quotient(square, count));
}

/** One without a figure stands last. */
function rankedAs(errorMm: number): number {
  return Number.isNaN(errorMm) ? Number.MAX_VALUE : errorMm;
}

interface Judged {
  readonly errors: Errors;
  readonly errorMm: number;
  readonly moreThanBestMm: number;
  readonly interval: ScoreInterval;
  readonly toldApart: boolean;
}

/** The candidates by their errors at some gauges, the smallest first, each against the best. */
function judge(
  all: readonly Moments[],
  gauges: readonly number[],
  mode: RankMode,
  { bootstrap }: RankInput,
): Judged[] {
  const counts = gauges.map((at) => all[0].n[at]);
  const candidates = all.map((moments) => {
    const errors = errorsAt(moments, gauges, gauges, mode);
    return { errors, errorMm: rootMean(errors.square, counts) };
  });
  candidates.sort((one, other) => rankedAs(one.errorMm) - rankedAs(other.errorMm));
  const best = candidates[0];
  const differences = candidates.map(() => new Float64Array(bootstrap.samples));
  const few = gauges.length < MIN_BOOTSTRAP_UNITS;
  if (!few) {
    const uniform = uniformStream(bootstrap.seed);
    const weights = new Float64Array(gauges.length);
    for (let sample = 0; sample < bootstrap.samples; sample++) {
      weights.fill(0);
      for (const _ of gauges) addCircularBlock(weights, Math.floor(uniform() * gauges.length), 1);
      const least = rootMean(best.errors.square, counts, weights);
      for (const [k, { errors }] of candidates.entries()) {
        differences[k][sample] = rootMean(errors.square, counts, weights) - least;
      }
    }
  }
  return candidates.map(({ errors, errorMm }, k) => {
    const interval: ScoreInterval = few
      ? {
          low: Number.NaN,
          high: Number.NaN,
          level: bootstrap.level,
          reason: `fewer than ${MIN_BOOTSTRAP_UNITS} gauges hold pairs`,
        }
      : limitsOf(differences[k], bootstrap.level);
    // One without a figure is no rival; rounding is no difference, even from a best error of 0.
    const toldApart = Number.isNaN(errorMm) || interval.low > AS_GOOD_WITHIN * best.errorMm + 1e-9;
    return { errors, errorMm, moreThanBestMm: errorMm - best.errorMm, interval, toldApart };
  });
}

function choose(judged: readonly Judged[], preferred: readonly string[]): string {
  const rivals = judged.filter(({ toldApart }) => !toldApart).map(({ errors }) => errors.name);
  return preferred.find((name) => rivals.includes(name)) ?? rivals[0] ?? judged[0].errors.name;
}

function rank(all: readonly Moments[], gauges: readonly number[], mode: RankMode, input: RankInput): Ranking {
  const judged = judge(all, gauges, mode, input);
  const byName = new Map(all.map((moments) => [moments.name, moments]));
  const counts = gauges.map((at) => all[0].n[at]);
  const gaugeSum = gauges.reduce((sum, at) => sum + all[0].g[at], 0);
  const meanGaugeMm = quotient(
    gaugeSum,
    counts.reduce((sum, n) => sum + n, 0),
  );
  const { errorMm, times } = errorOfChoice(all, gauges, mode, input);
  return {
    mode,
    relations: judged.map(({ errors, ...row }) => {
      const { r, g } = byName.get(errors.name) as Moments;
      const sums = gauges.map((at, k) => errors.factor[k] * r[at]);
      const ones = gauges.map(() => 1);
      return {
        name: errors.name,
        biasRatio: quotient(
          sums.reduce((sum, mm) => sum + mm, 0),
          gaugeSum,
        ),
        errorMm: row.errorMm,
        errorPercent: 100 * quotient(row.errorMm, meanGaugeMm),
        sumErrorMm: rootMean(
          gauges.map((at, k) => (sums[k] - g[at]) ** 2),
          ones,
        ),
        moreThanBestMm: row.moreThanBestMm,
        interval: row.interval,
        toldApart: row.toldApart,
      };
    }),
    best: judged[0].errors.name,
    chosen: choose(judged, input.preferred),
    choiceErrorMm: errorMm,
    chosenInFolds: times,
  };
}

/** The error of the rule itself: each fold of gauges is met by what the rule chooses without it. */
function errorOfChoice(all: readonly Moments[], gauges: readonly number[], mode: RankMode, input: RankInput) {
  const times = new Map<string, number>();
  const squares: number[] = [];
  const counts: number[] = [];
  const folds = Math.min(MOST_FOLDS, gauges.length);
  for (let fold = 0; folds > 1 && fold < folds; fold++) {
    const asked = gauges.filter((_, k) => k % folds === fold);
    const others = gauges.filter((_, k) => k % folds !== fold);
    const chosen = choose(judge(all, others, mode, input), input.preferred);
    times.set(chosen, (times.get(chosen) ?? 0) + 1);
    const moments = all.find(({ name }) => name === chosen) as Moments;
    squares.push(...errorsAt(moments, asked, others, mode).square);
    counts.push(...asked.map((at) => moments.n[at]));
  }
  return { errorMm: rootMean(squares, counts), times };
}
