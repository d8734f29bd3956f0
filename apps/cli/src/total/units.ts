import { cutWindow } from "@rainreckon/accumulation";
import type { Interval } from "@rainreckon/core";
import type { JobRadar, UnitJob } from "./job.ts";

/** Fewest rounds a unit holds, so that decoding its border scans once more costs little. */
export const MIN_ROUNDS_PER_UNIT = 12;

/**
 * Cuts a run into units of work: runs of whole grid intervals, each holding at least a dozen rounds of the
 * busiest radar. The last unit takes what is left over.
 *
 * @param intervals - the grid intervals of the window
 * @param stepMs - length of a series step; it divides the intervals
 */
export function cutIntoUnits(
  intervals: readonly Interval[],
  stepMs: number,
  radars: readonly JobRadar[],
): UnitJob[] {
  const roundsIn = (from: number, to: number) =>
    Math.max(
      ...radars.map(
        ({ rounds }) =>
          rounds.filter((round) => round.firstMidEpochMs > from && round.firstMidEpochMs <= to).length,
      ),
    );
  const groups: Interval[][] = [];
  let open: Interval[] = [];
  for (const interval of intervals) {
    open.push(interval);
    if (roundsIn(open[0].startEpochMs, interval.endEpochMs) >= MIN_ROUNDS_PER_UNIT) {
      groups.push(open);
      open = [];
    }
  }
  const last = groups.at(-1);
  if (open.length > 0) {
    if (last === undefined) groups.push(open);
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
