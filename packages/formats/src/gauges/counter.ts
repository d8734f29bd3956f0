/** Slack for levels written in decimals: 1.0 - 0.7 is a hair more than 0.3. */
const SLACK_MM = 1e-9;
/** A rise past the end of the counter is believed up to this share of its range; beyond, it was reset. */
const ROLLOVER_SHARE = 0.1;

/** What became of one level of a counter. */
export type CounterOutcome =
  | "first"
  | "ok"
  | "missing"
  /** A small fall: no rain, and the old level stays the one to count from. */
  | "jitter"
  /** The counter started again: the level itself is the increment, which is a lower bound. */
  | "reset"
  /** The counter fell, but not to the lower half of its level: an increment hard to believe in. */
  | "doubtful-reset"
  | "rollover"
  /** A level far off that the next one does not bear out: passed over, as if missing. */
  | "outlier"
  /** More rain than can fall, yet the next level bears it out: no increment, counted on from here. */
  | "impossible";

export interface CounterRules {
  /** Fall that is taken for jitter, mm. */
  readonly jitterMm: number;
  /** Level at which the counter starts again from 0, mm; undefined is never. */
  readonly rollsOverAtMm: number | undefined;
  readonly maxMmPerMinute: number;
}

/**
 * Increments of a level that only rises.
 *
 * Rules in this order (house rules): missing, then rollover or reset, then jitter. A missing level gives no
 * increment, and the next one covers the gap. A fall of more than the jitter is a rollover where the counter
 * has an end and the rise past it is small, else a reset, whose increment is the new level. After a smaller
 * fall the old level stays, or the jitter would be counted as rain on its way up. A level that the next one
 * contradicts (up and down again, or down and up again) is an outlier and is passed over.
 *
 * @param levelsMm - shape [n], mm; NaN missing
 * @param epochMs - shape [n], ascending
 * @returns `incrementMm`, shape [n], NaN where there is none; `outcomes`, shape [n]
 */
export function counterIncrements(
  levelsMm: ArrayLike<number>,
  epochMs: ArrayLike<number>,
  rules: CounterRules,
): { readonly incrementMm: Float64Array; readonly outcomes: readonly CounterOutcome[] } {
  const incrementMm = new Float64Array(levelsMm.length).fill(Number.NaN);
  const outcomes: CounterOutcome[] = [];
  let level = Number.NaN;
  let sinceMs = Number.NaN;
  for (let index = 0; index < levelsMm.length; index++) {
    const value = levelsMm[index];
    const limitMm = (rules.maxMmPerMinute * (epochMs[index] - sinceMs)) / 60_000;
    const [outcome, increment] = judge(value, level, nextLevel(levelsMm, index), limitMm, rules);
    outcomes.push(outcome);
    incrementMm[index] = increment;
    if (outcome === "missing" || outcome === "outlier") continue;
    sinceMs = epochMs[index];
    if (outcome !== "jitter") level = value;
  }
  return { incrementMm, outcomes };
}

function judge(
  value: number,
  level: number,
  next: number,
  limitMm: number,
  rules: CounterRules,
): readonly [CounterOutcome, number] {
  if (Number.isNaN(value)) return ["missing", Number.NaN];
  if (Number.isNaN(level)) return ["first", Number.NaN];
  const rise = value - level;
  const jitter = rules.jitterMm + SLACK_MM;
  if (rise >= 0) {
    if (rise <= limitMm) return ["ok", rise];
    return [next >= value - jitter ? "impossible" : "outlier", Number.NaN];
  }
  if (rise >= -jitter) return ["jitter", 0];
  if (rules.rollsOverAtMm !== undefined) {
    const past = value + rules.rollsOverAtMm - level;
    if (past >= 0 && past <= ROLLOVER_SHARE * rules.rollsOverAtMm && past <= limitMm)
      return ["rollover", past];
  }
  const comesBack = next >= level - jitter && next - level < -rise / 2;
  if (comesBack) return ["outlier", Number.NaN];
  if (value > limitMm) return ["impossible", Number.NaN];
  return [value > level / 2 ? "doubtful-reset" : "reset", value];
}

function nextLevel(levelsMm: ArrayLike<number>, from: number): number {
  for (let index = from + 1; index < levelsMm.length; index++) {
    if (!Number.isNaN(levelsMm[index])) return levelsMm[index];
  }
  return Number.NaN;
}
