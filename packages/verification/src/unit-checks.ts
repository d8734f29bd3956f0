import { median, medianAbsoluteDeviation } from "simple-statistics";
import { decibels, fromDecibels } from "./numbers.ts";

/** A way in which a column's unit can be mistaken: what the values are too large by. */
export interface UnitMistake {
  readonly factor: number;
  readonly words: string;
}

/**
 * How far a gauge may lie from a mistake's exact factor, in decibels: sound gauges scatter about their
 * median by as much. Several mistakes can fit; all are named, the nearest first.
 */
const NEAR_DB = 2.5;
/** How far its intervals may lie from the gauge's own ratio. */
const NEAR_INTERVAL_DB = 3;
/** A gauge closer to its neighbours than this has no unit mistake: the smallest factor looked for is 2. */
const LEAST_OFFSET_DB = 3;
/** How far the neighbours' median may lie from 1 (a factor of 2.5) for the radar to be a reference. */
const REFERENCE_DB = 4;
/** Share of the gauge's wet intervals that must show the factor: a storm over one gauge shows it in a few. */
const CONSISTENT_SHARE = 2 / 3;
const LEAST_INTERVALS = 3;
/** Share of the offset, in decibels, that the gauge's own depth beside the other gauges must account for. */
const OWN_SHARE = 0.5;
/** 1.4826 makes the MAD of a normal sample its standard deviation. */
const MAD_TO_SD = 1.4826;

/** Middle and spread of other gauges' log ratios gauge/radar, in decibels. */
export interface Reference {
  readonly count: number;
  readonly medianDb: number;
  /** From the median absolute deviation, at least 1 dB. */
  readonly spreadDb: number;
}

/** Middle and spread of log ratios by median and MAD, which a few bad gauges do not move. */
export function referenceOf(ratiosDb: readonly number[]): Reference {
  const values = [...ratiosDb];
  return {
    count: values.length,
    medianDb: median(values),
    spreadDb: Math.max(1, MAD_TO_SD * medianAbsoluteDeviation(values)),
  };
}

/** Whether a reference lies near 1, so that an offset from it can be a gauge's own. */
export function isNearOne(reference: Reference): boolean {
  return Math.abs(reference.medianDb) <= REFERENCE_DB;
}

/** Unit mistakes that a gauge of a step and a tip size can show. */
export function unitMistakes(stepMs: number | undefined, tipMm: number | undefined): readonly UnitMistake[] {
  const mistakes: UnitMistake[] = [
    { factor: 10, words: "values look 10 times too large (tenths of mm?)" },
    { factor: 1 / 10, words: "values look 10 times too small (cm?)" },
    { factor: 100, words: "values look 100 times too large (hundredths of mm?)" },
    { factor: 1 / 100, words: "values look 100 times too small" },
    { factor: 25.4, words: "values look 25.4 times too large (mm read as inches?)" },
    { factor: 1 / 25.4, words: "values look 25.4 times too small (inches read as mm?)" },
  ];
  if (stepMs !== undefined && stepMs <= 30 * 60_000) {
    const minutes = stepMs / 60_000;
    const factor = 60 / minutes;
    const times = Number(factor.toFixed(2));
    mistakes.push({
      factor,
      words: `values look ${times} times too large (mm/h read as mm per ${minutes} min?)`,
    });
    mistakes.push({
      factor: 1 / factor,
      words: `values look ${times} times too small (mm per ${minutes} min read as mm/h?)`,
    });
  }
  if (tipMm !== undefined && tipMm > 0 && (tipMm <= 0.5 || tipMm >= 2)) {
    const times = Number((1 / tipMm).toFixed(2));
    mistakes.push({
      factor: 1 / tipMm,
      words: `values look ${times} times too large (tips of ${tipMm} mm read as mm?)`,
    });
  }
  return mistakes;
}

/** A mistake that a gauge's rain fits. */
export interface UnitFinding {
  readonly mistakes: readonly UnitMistake[];
  /** Gauge over radar, relative to the other gauges. */
  readonly offset: number;
  readonly intervals: number;
  readonly fitting: number;
}

/** A gauge beside the radar and beside the other gauges, in decibels. */
export interface UnitEvidence {
  /** 10 log10(gauge / radar) of the whole window. */
  readonly ratioDb: number;
  /** The same for each wet interval. */
  readonly intervalRatiosDb: readonly number[];
  /** 10 log10(gauge / median of the other gauges' depths). */
  readonly depthDb: number;
}

/**
 * Whether a gauge's ratio to the radar sits on the factor of a mistaken unit, all through the rain.
 *
 * Four things must hold. The gauge lies within 2.5 dB of a factor, measured from the median of
 * the others, which lies near 1. It is an outlier: at least three spreads from that median. Its own depth is
 * out of line with the other gauges: where only the radar is (behind a hill, say), the gauge is not
 * to blame. And two thirds of its wet intervals, at least three, show the same factor within 3 dB: a wrong
 * unit does so in every interval, a cloudburst that the radar missed in one or two.
 */
export function findUnitMistake(
  { ratioDb, intervalRatiosDb, depthDb }: UnitEvidence,
  reference: Reference,
  mistakes: readonly UnitMistake[],
): UnitFinding | undefined {
  if (!isNearOne(reference)) return undefined;
  const offsetDb = ratioDb - reference.medianDb;
  if (Math.abs(offsetDb) < Math.max(LEAST_OFFSET_DB, 3 * reference.spreadDb)) return undefined;
  if (!(depthDb / offsetDb >= OWN_SHARE)) return undefined;
  const missDb = ({ factor }: UnitMistake) => Math.abs(offsetDb - decibels(factor));
  const fits = mistakes.filter((mistake) => missDb(mistake) <= NEAR_DB);
  if (fits.length === 0 || intervalRatiosDb.length < LEAST_INTERVALS) return undefined;
  const fitting = intervalRatiosDb.filter(
    (interval) => Math.abs(interval - ratioDb) <= NEAR_INTERVAL_DB,
  ).length;
  if (fitting < CONSISTENT_SHARE * intervalRatiosDb.length) return undefined;
  return {
    mistakes: fits.sort((a, b) => missDb(a) - missDb(b)),
    offset: fromDecibels(offsetDb),
    intervals: intervalRatiosDb.length,
    fitting,
  };
}
