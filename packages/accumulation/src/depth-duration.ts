import { allSteps, depthOfSteps, type RainSeries, type SpanDepth, type StepRange } from "./rain-series.ts";

const MINUTE_MS = 60_000;

/** Durations that are looked at where nobody names others: 5 minutes to 7 days. House rule. */
export const USUAL_DURATIONS_MS: readonly number[] = [
  5, 10, 15, 30, 60, 120, 180, 360, 720, 1440, 2880, 4320, 10_080,
].map((minutes) => minutes * MINUTE_MS);

/** The largest depth of a duration, and when it fell. */
export interface DurationMaximum extends SpanDepth {
  readonly durationMs: number;
}

/** Why a duration has no maximum. */
export interface NoMaximum {
  readonly durationMs: number;
  readonly reason: string;
}

export interface DurationOptions {
  /** Only windows that share a step with this range; the whole series where left out. */
  readonly sharing?: StepRange;
  /**
   * Only windows that begin at a whole multiple of the duration, counted from this instant; all windows that begin with
   * a step where left out.
   */
  readonly clockAnchorEpochMs?: number;
}

/**
 * The largest depth of each duration over all windows of whole steps (rolling maxima). What was not observed adds
 * nothing, so a maximum over a window that was seen in part is a lower bound: observedFraction says so.
 *
 * A rolling maximum of steps is itself short of the maximum over windows that begin at any instant; by how much on
 * average, over many years, says {@link fixedToSlidingRatio}.
 *
 * @param durationsMs - those that are no whole number of steps, or longer than the series, come back with a reason
 */
export function durationMaxima(
  series: RainSeries,
  durationsMs: readonly number[],
  { sharing = allSteps(series), clockAnchorEpochMs }: DurationOptions = {},
): (DurationMaximum | NoMaximum)[] {
  const { depthMm, stepMs, startEpochMs } = series;
  const count = depthMm.length;
  // Sums from the first step on, so that a window is one difference.
  const before = new Float64Array(count + 1);
  for (let k = 0; k < count; k++) before[k + 1] = before[k] + (depthMm[k] || 0);
  return durationsMs.map((durationMs) => {
    const length = durationMs / stepMs;
    if (!Number.isInteger(length) || length < 1)
      return { durationMs, reason: `no whole number of steps of ${minutes(stepMs)}` };
    if (length > count) return { durationMs, reason: "longer than what is known" };
    let best = -1;
    let bestMm = -1;
    const last = Math.min(count - length, sharing.to - 1);
    for (let from = Math.max(0, sharing.from - length + 1); from <= last; from++) {
      if (
        clockAnchorEpochMs !== undefined &&
        (startEpochMs + from * stepMs - clockAnchorEpochMs) % durationMs !== 0
      )
        continue;
      const mm = before[from + length] - before[from];
      // Sums that differ by rounding alone are the same: the first window counts.
      if (mm > bestMm + 1e-9) {
        best = from;
        bestMm = mm;
      }
    }
    if (best < 0)
      return { durationMs, reason: "no whole clock interval of this length lies in what is known" };
    const found = depthOfSteps(series, { from: best, to: best + length });
    if (Number.isNaN(found.depthMm)) return { durationMs, reason: "not observed" };
    return { durationMs, ...found };
  });
}

/**
 * Largest depth of a duration that may begin at any instant, over the largest depth of as many fixed intervals: its
 * mean over annual maxima, n / (n - 1/8).
 *
 * It belongs to statistics of many years and is never applied to one event: a burst within one interval has 1, steady
 * rain exactly one interval long 4/3.
 *
 * @param intervals - number of fixed intervals that make up the duration, at least 1
 * @throws RangeError below 1
 * @remarks Weiss (1964), Journal of the Hydraulics Division ASCE 90(HY1), 77-80; from memory. For one interval (1.143)
 * Hershfield (1961), US Weather Bureau Technical Paper 40, found 1.13; from memory.
 */
export function fixedToSlidingRatio(intervals: number): number {
  if (!(intervals >= 1)) throw new RangeError(`a duration has at least one interval, not ${intervals}`);
  return intervals / (intervals - 0.125);
}

function minutes(ms: number): string {
  return `${ms / MINUTE_MS} min`;
}
