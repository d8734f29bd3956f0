import { gaugeKey, type Pair, type Score, type ScoreInterval } from "@rainreckon/core";
import { type BootstrapSettings, bootstrapIntervals, MIN_BOOTSTRAP_UNITS } from "./bootstrap.ts";
import { type DepthPairs, keptBy, pick } from "./conditioning.ts";
import {
  type ContingencyCounts,
  contingencyCounts,
  contingencyEvaluator,
  contingencyScores,
  contingencyStandardErrors,
  contingencyWilson,
} from "./contingency.ts";
import { additiveEvaluator, additiveScores, ratioEvaluator, ratioScores } from "./continuous.ts";
import { namesOf, SCORE_DEFINITIONS, type ScoreName } from "./definitions.ts";
import type { Evaluator, ScoreValue, Units } from "./evaluator.ts";

export interface ScoreOptions {
  /** Depth from which a pair counts as wet, mm per interval. */
  readonly thresholdMm: number;
  /** Thresholds of the yes-or-no scores, mm per interval. */
  readonly thresholdsMm: readonly number[];
  /** Inner borders of the range bands, km, ascending; a pair on a border belongs to the band beyond it. */
  readonly rangeBandsKm: readonly number[];
  /** Usual length of the pairs' intervals. */
  readonly pairIntervalMs: number;
  /** Smallest depth each gauge can tell, by `gaugeKey`: a larger one than `thresholdMm` takes its place. */
  readonly resolutionMm?: ReadonlyMap<string, number>;
  readonly bootstrap: BootstrapSettings & { readonly blockMinutes: number };
}

/** A score of yes and no: with what its counts alone say of its uncertainty. */
export interface ContingencyScore extends Score {
  /** Wilson interval, for scores that are a share of counts; pairs taken as independent. */
  readonly wilson?: ScoreInterval;
  /** Standard error in closed form, pairs taken as independent. */
  readonly standardError?: number;
}

/** Yes-or-no scores at one threshold. */
export interface ThresholdScores {
  readonly thresholdMm: number;
  readonly counts: ContingencyCounts;
  readonly scores: readonly ContingencyScore[];
}

/** The scores of one set of pairs. */
export interface ScoreGroup {
  /** Used pairs, and the gauges and intervals they come from. */
  readonly pairs: number;
  readonly gauges: number;
  readonly intervals: number;
  /** Depth scores and ratio scores, in the order of `SCORE_DEFINITIONS`. */
  readonly continuous: readonly Score[];
  readonly thresholds: readonly ThresholdScores[];
}

export interface RangeGroup extends ScoreGroup {
  readonly fromKm: number;
  /** Infinity for the last band. */
  readonly toKm: number;
}

export interface GaugeGroup extends ScoreGroup {
  readonly network: string;
  readonly gaugeId: string;
}

export interface IntervalGroup extends ScoreGroup {
  readonly startEpochMs: number;
  readonly endEpochMs: number;
}

/** All scores of a run's pairs: the whole, and by range band, gauge and interval. */
export interface ScoreTable {
  readonly pairCount: number;
  readonly usedCount: number;
  /** Why pairs took no part, by reason, most frequent first. */
  readonly unused: readonly { readonly reason: string; readonly count: number }[];
  readonly whole: ScoreGroup;
  readonly byRange: readonly RangeGroup[];
  readonly byGauge: readonly GaugeGroup[];
  readonly byInterval: readonly IntervalGroup[];
}

/**
 * Scores of pairs, radar against gauge, for a run as a whole and by range band, gauge and interval.
 *
 * Only used pairs count. Depth scores are worked out on pairs where either side reached the wet
 * threshold, ratio scores where both did, yes-or-no scores on all; each score carries how many pairs
 * its rule kept and dropped.
 * Intervals of confidence resample blocks of time with all gauges together, and gauges with all their
 * times together; fewer than 8 blocks or gauges that hold kept pairs give none, with the reason.
 *
 * @param pairs - pairs of equal intervals; their intervals, used or not, make the time line that blocks are cut from
 * @throws RangeError if a used pair holds a depth that is not finite
 */
export function scorePairs(pairs: readonly Pair[], options: ScoreOptions): ScoreTable {
  const used = pairs.filter((pair) => pair.used);
  const timeline = [...new Set(pairs.map((pair) => pair.startEpochMs))].sort((a, b) => a - b);
  const frame: Frame = {
    options,
    timeIndex: new Map(timeline.map((startEpochMs, index) => [startEpochMs, index])),
    blockLength: Math.max(1, Math.round((options.bootstrap.blockMinutes * 60_000) / options.pairIntervalMs)),
  };
  return {
    pairCount: pairs.length,
    usedCount: used.length,
    unused: countReasons(pairs.filter((pair) => !pair.used)),
    whole: scoreGroup(used, frame),
    byRange: rangeBands(options.rangeBandsKm)
      .map((band) => ({
        band,
        pairs: used.filter(({ rangeKm }) => rangeKm >= band.fromKm && rangeKm < band.toKm),
      }))
      .filter((group) => group.pairs.length > 0)
      .map((group) => ({ ...group.band, ...scoreGroup(group.pairs, frame) })),
    byGauge: groupsOf(used, keyOfGauge).map((group) => ({
      network: group[0].network,
      gaugeId: group[0].gaugeId,
      ...scoreGroup(group, frame),
    })),
    byInterval: groupsOf(used, (pair) => pair.startEpochMs)
      .sort((a, b) => a[0].startEpochMs - b[0].startEpochMs)
      .map((group) => ({
        startEpochMs: group[0].startEpochMs,
        endEpochMs: group[0].endEpochMs,
        ...scoreGroup(group, frame),
      })),
  };
}

/** What all groups of a run share. */
interface Frame {
  readonly options: ScoreOptions;
  /** Place of an interval on the run's time line, by its start. */
  readonly timeIndex: ReadonlyMap<number, number>;
  /** Block length in intervals. */
  readonly blockLength: number;
}

function scoreGroup(group: readonly Pair[], frame: Frame): ScoreGroup {
  const { options } = frame;
  const depths: DepthPairs = {
    gaugeMm: Float64Array.from(group, (pair) => pair.gaugeMm),
    radarMm: Float64Array.from(group, (pair) => pair.radarMm),
  };
  const thresholds = Float64Array.from(group, (pair) =>
    Math.max(options.thresholdMm, options.resolutionMm?.get(keyOfGauge(pair)) ?? 0),
  );
  const either = keptBy("either", depths, thresholds);
  const both = keptBy("both", depths, thresholds);
  const eitherDepths = pick(depths, either);
  const bothDepths = pick(depths, both);
  const eitherPairs = either.map((i) => group[i]);
  const bothPairs = both.map((i) => group[i]);
  return {
    pairs: group.length,
    gauges: new Set(group.map(keyOfGauge)).size,
    intervals: new Set(group.map((pair) => pair.startEpochMs)).size,
    continuous: [
      ...toScores(
        additiveScores(eitherDepths),
        intervalsOf((units) => additiveEvaluator(eitherDepths, units), eitherPairs, frame),
        either.length,
        group.length - either.length,
      ),
      ...toScores(
        ratioScores(bothDepths),
        intervalsOf((units) => ratioEvaluator(bothDepths, units), bothPairs, frame),
        both.length,
        group.length - both.length,
      ),
    ],
    thresholds: options.thresholdsMm.map((thresholdMm) => atThreshold(group, depths, thresholdMm, frame)),
  };
}

function atThreshold(
  group: readonly Pair[],
  depths: DepthPairs,
  thresholdMm: number,
  frame: Frame,
): ThresholdScores {
  const counts = contingencyCounts(depths, thresholdMm);
  const wilson = contingencyWilson(counts, frame.options.bootstrap.level);
  const standardErrors: Partial<Record<ScoreName, number>> = contingencyStandardErrors(counts);
  const intervals = intervalsOf((units) => contingencyEvaluator(depths, thresholdMm, units), group, frame);
  const scores = toScores(contingencyScores(counts), intervals, group.length, 0).map(
    (score): ContingencyScore => {
      const name = score.name as keyof typeof wilson;
      const share = wilson[name];
      const standardError = standardErrors[name];
      return {
        ...score,
        ...(share === undefined ? {} : { wilson: share }),
        ...(standardError === undefined ? {} : { standardError }),
      };
    },
  );
  return { thresholdMm, counts, scores };
}

/** The interval of confidence of a score, by its name. */
type IntervalLookup<Name extends string> = (name: Name) => ScoreInterval;

/** Both intervals of confidence of a set of scores, or why there are none. */
function intervalsOf<Name extends string>(
  evaluatorFor: (units: Units) => Evaluator<Name>,
  kept: readonly Pair[],
  { options, timeIndex, blockLength }: Frame,
): Record<"timeBlocks" | "gauges", IntervalLookup<Name>> {
  const timeOf = Uint32Array.from(kept, (pair) => timeIndex.get(pair.startEpochMs) ?? 0);
  const blocks = new Set(timeOf.map((unit) => Math.floor(unit / blockLength))).size;
  const gauges = [...new Set(kept.map(keyOfGauge))];
  const gaugeIndex = new Map(gauges.map((key, index) => [key, index]));
  const gaugeOf = Uint32Array.from(kept, (pair) => gaugeIndex.get(keyOfGauge(pair)) ?? 0);

  const resampled = (unitOf: Uint32Array, unitCount: number, length: number): IntervalLookup<Name> => {
    const evaluator = evaluatorFor({ unitOf, unitCount });
    const found = bootstrapIntervals(evaluator, unitCount, length, options.bootstrap);
    return (name) => found[name];
  };
  const none = (reason: string): IntervalLookup<Name> => {
    const interval = { low: Number.NaN, high: Number.NaN, level: options.bootstrap.level, reason };
    return () => interval;
  };
  return {
    timeBlocks:
      blocks < MIN_BOOTSTRAP_UNITS
        ? none(`fewer than ${MIN_BOOTSTRAP_UNITS} blocks of time hold pairs`)
        : resampled(timeOf, timeIndex.size, blockLength),
    gauges:
      gauges.length < MIN_BOOTSTRAP_UNITS
        ? none(`pairs of fewer than ${MIN_BOOTSTRAP_UNITS} gauges`)
        : resampled(gaugeOf, gauges.length, 1),
  };
}

function toScores<Name extends ScoreName>(
  values: Record<Name, ScoreValue>,
  intervals: Record<"timeBlocks" | "gauges", IntervalLookup<Name>>,
  n: number,
  dropped: number,
): Score[] {
  return namesOf(values).map((name) => {
    const { unit, best, definition } = SCORE_DEFINITIONS[name];
    return {
      name,
      ...values[name],
      unit,
      best,
      definition,
      n,
      dropped,
      intervals: { timeBlocks: intervals.timeBlocks(name), gauges: intervals.gauges(name) },
    };
  });
}

function keyOfGauge(pair: Pair): string {
  return gaugeKey({ network: pair.network, id: pair.gaugeId });
}

function groupsOf<Key>(pairs: readonly Pair[], keyOf: (pair: Pair) => Key): Pair[][] {
  const groups = new Map<Key, Pair[]>();
  for (const pair of pairs) {
    const group = groups.get(keyOf(pair));
    if (group === undefined) groups.set(keyOf(pair), [pair]);
    else group.push(pair);
  }
  return [...groups.values()];
}

function rangeBands(bordersKm: readonly number[]): { fromKm: number; toKm: number }[] {
  const edges = [0, ...bordersKm, Number.POSITIVE_INFINITY];
  return edges.slice(1).map((toKm, index) => ({ fromKm: edges[index], toKm }));
}

function countReasons(pairs: readonly Pair[]): { reason: string; count: number }[] {
  return groupsOf(pairs, (pair) => pair.reason)
    .map((group) => ({ reason: group[0].reason, count: group.length }))
    .sort((a, b) => b.count - a.count || (a.reason < b.reason ? -1 : 1));
}
