import { cutWindow } from "@rainreckon/accumulation";
import type { Interval } from "@rainreckon/core";
import type { UnitJob } from "./job.ts";

/** Fewest rounds a unit holds, so that decoding its border scans once more costs little. */
export const MIN_ROUNDS_PER_UNIT = 12;

/** Most intervals a unit holds: it has all of them in memory, and a radar may be silent for weeks. */
export const MAX_INTERVALS_PER_UNIT = 48;

/**
 * Cuts a run into units of work: runs of whole grid intervals, each holding at least a dozen rounds of the
 * busiest source, or as many intervals as a unit may hold. The last unit takes what is left over, if it may.
 *
 * @param intervals - the grid intervals of the window
 * @param stepMs - length of a series step; it divides the intervals
 */
export function cutIntoUnits(
  intervals: readonly Interval[],
  stepMs: number,
  sources: readonly { readonly rounds: readonly { readonly firstMidEpochMs: number }[] }[],
): UnitJob[] {
  const roundsIn = (from: number, to: number) =>
    Math.max(
      ...sources.map(
        ({ rounds }) =>
          rounds.filter((round) => round.firstMidEpochMs > from && round.firstMidEpochMs <= to).length,
      ),
    );
  const groups: Interval[][] = [];
  let open: Interval[] = [];
  for (const interval of intervals) {
    open.push(interval);
    const full = open.length === MAX_INTERVALS_PER_UNIT;
    if (full || roundsIn(open[0].startEpochMs, interval.endEpochMs) >= MIN_ROUNDS_PER_UNIT) {
      groups.push(open);
      open = [];
    }
  }
  const last = groups.at(-1);
  if (open.length > 0) {
    if (last === undefined || last.length + open.length > MAX_INTERVALS_PER_UNIT) groups.push(open);
    else last.push(...open);
  }
  return groups.map((group, number) => ({
    number,
    intervals: group,
    steps: cutWindow(
      { startEpochMs: group[0].startEpochMs, endEpochMs: group[group.length - 1].endEpochMs },
      stepMs,
      group[0].startEpochMs,
    ),
  }));
}
