import { median, quantile } from "simple-statistics";
import { isJudgeable, misfitAt, type Subject } from "./subject.ts";

/** Distance over which what the radar makes of neighbours speaks for a place, km. House rule. */
const NEAR_KM = 10;
/** Gauges of a network that make its level. */
const LEAST_GAUGES = 3;
/** Networks whose levels differ by more than this cannot both be right; dB. */
const FAR_APART_DB = 3;
/** Farther from the middle a gauge has a fault of its own, dB. */
const OWN_FAULT_DB = 6;
/** A gauge keeps one ratio to the radar where it fits it within so many usual misfits once that is taken out. */
const STEADY_USUAL = 4;
/** Share of the gauges that are taken for sound when the usual misfit is measured: half a network may be wrong. */
const SOUND_SHARE = 1 / 3;
/** A misfit below this is as good as none. */
const LEAST_USUAL = 0.5;
/** What the level of all gauges weighs beside neighbours, as one at no distance. */
const LEVEL_WEIGHT = 0.5;

/** What sound gauges of a run make of the radar. */
export interface ReferenceLevel {
  /** Gauge over radar, in decibels: the middle of the networks' middles. */
  readonly levelDb: number;
  /** How badly a sound gauge fits. */
  readonly usualMisfit: number;
  readonly gauges: number;
  /**
   * Spread of the other gauges about the level, dB, one standard deviation: of those that keep one ratio to the radar
   * and have no gross fault.
   */
  spreadDb(subject: Subject): number;
  /** Depth in the middle of the gauges. */
  readonly medianMm: number;
  /** Level at a gauge, by the others around it. */
  at(subject: Subject): number;
}

/**
 * The level of the radar beside all gauges, and around each of them by the others.
 *
 * One network may be wrong as a whole, so the middle is that of the networks' medians; where two of them contradict,
 * the one nearer to the radar is taken, as the radar is never off by the factor of a unit. Around a gauge the level
 * is a weighted median of the others, weights falling with distance: the radar may be low in a sector.
 */
export function referenceLevel(subjects: readonly Subject[]): ReferenceLevel {
  const wet = subjects.filter((subject) => isJudgeable(subject) && Number.isFinite(subject.ratioDb));
  const levelDb = middleOf(wet);
  const misfits = wet.map((subject) => misfitAt(subject, levelDb).perStep);
  const usual = misfits.length === 0 ? LEAST_USUAL : quantile(misfits, SOUND_SHARE);
  const usualMisfit = Math.max(LEAST_USUAL, usual);
  const steady = wet.filter(
    (subject) =>
      Math.abs(subject.ratioDb - levelDb) <= OWN_FAULT_DB &&
      misfitAt(subject, subject.ratioDb).perStep <= STEADY_USUAL * usualMisfit,
  );
  return {
    levelDb,
    usualMisfit,
    gauges: wet.length,
    spreadDb(subject) {
      const squares = steady
        .filter((other) => other !== subject)
        .map(({ ratioDb }) => (ratioDb - levelDb) ** 2);
      return squares.length === 0 ? 0 : Math.sqrt(squares.reduce((sum, db) => sum + db, 0) / squares.length);
    },
    medianMm: wet.length === 0 ? Number.NaN : median(wet.map(({ plain }) => plain.gaugeMm)),
    at(subject) {
      // Others with a fault of their own do not speak for the radar.
      const near = wet.filter(
        (other) => other !== subject && Math.abs(other.ratioDb - levelDb) <= OWN_FAULT_DB,
      );
      const values = near.map(({ ratioDb }) => ratioDb);
      const weights = near.map((other) => {
        const { xKm, yKm } = other.evidence;
        const distance = Math.hypot(xKm - subject.evidence.xKm, yKm - subject.evidence.yKm);
        return Math.exp(-((distance / NEAR_KM) ** 2) / 2);
      });
      return weightedMedian([...values, levelDb], [...weights, LEVEL_WEIGHT]);
    },
  };
}

function middleOf(wet: readonly Subject[]): number {
  const byNetwork = new Map<string, number[]>();
  for (const { evidence, ratioDb } of wet) {
    byNetwork.set(evidence.series.network, [...(byNetwork.get(evidence.series.network) ?? []), ratioDb]);
  }
  const large = [...byNetwork.values()].filter((ratios) => ratios.length >= LEAST_GAUGES);
  const levels = large.map((ratios) => median(ratios)).sort((a, b) => a - b);
  if (levels.length === 0) return wet.length < LEAST_GAUGES ? 0 : median(wet.map(({ ratioDb }) => ratioDb));
  if (levels.length === 2 && levels[1] - levels[0] > FAR_APART_DB) {
    return Math.abs(levels[0]) < Math.abs(levels[1]) ? levels[0] : levels[1];
  }
  return median(levels);
}

/** The value at which half of the weight is reached; between two, their middle. */
export function weightedMedian(values: readonly number[], weights: readonly number[]): number {
  const order = values.map((_, i) => i).sort((a, b) => values[a] - values[b]);
  const half = weights.reduce((sum, weight) => sum + weight, 0) / 2;
  let sum = 0;
  for (const i of order) {
    sum += weights[i];
    if (sum >= half) return values[i];
  }
  return Number.NaN;
}
