import { type Interval, QUALITY_USE } from "@rainreckon/core";
import type { Silence } from "./gauge-file-spec.ts";
import { ReadingList } from "./reading-list.ts";

/**
 * Fills the time between readings as the network's rule for silence says.
 *
 * dry: the rest of `span` is dry. heartbeat: time is dry for so long after a reading. missing: nothing is
 * filled. Where rows that had to be left out may lie, nothing counts as dry: that time is not observed.
 *
 * @param uncertain - spans in which a row may be missing from `readings`, in any order
 * @returns the readings with zero (and, where uncertain, NaN) readings between them, and the dry time added
 */
export function fillSilence(
  readings: ReadingList,
  silence: Silence,
  span: Interval,
  uncertain: readonly Interval[],
): { readonly readings: ReadingList; readonly dryMs: number } {
  if (silence.rule === "missing") return { readings, dryMs: 0 };
  const filled = new ReadingList();
  const doubts = [...uncertain].sort((a, b) => a.startEpochMs - b.startEpochMs);
  const aliveUntil = (lastEndEpochMs: number) =>
    silence.rule === "heartbeat" ? lastEndEpochMs + silence.heartbeatMs : Number.POSITIVE_INFINITY;
  let dryMs = 0;

  const fill = (from: number, to: number) => {
    const end = Math.min(to, span.endEpochMs, aliveUntil(from));
    let at = Math.max(from, span.startEpochMs);
    for (const doubt of doubts) {
      if (doubt.endEpochMs <= at || doubt.startEpochMs >= end) continue;
      dry(at, doubt.startEpochMs);
      at = Math.max(at, doubt.startEpochMs);
      const until = Math.min(doubt.endEpochMs, end);
      filled.add(at, until, Number.NaN, QUALITY_USE);
      at = until;
    }
    dry(at, end);
  };
  const dry = (from: number, to: number) => {
    if (!(to > from)) return;
    filled.add(from, to, 0, QUALITY_USE);
    dryMs += to - from;
  };

  const starts = readings.startEpochMs.view();
  const ends = readings.endEpochMs.view();
  const depths = readings.depthMm.view();
  const qualities = readings.quality.view();
  // Before its first row a gauge is only known to be dry where silence always means dry.
  let last = silence.rule === "dry" ? Number.NEGATIVE_INFINITY : Number.POSITIVE_INFINITY;
  for (let index = 0; index < starts.length; index++) {
    if (starts[index] > last) fill(last, starts[index]);
    filled.add(starts[index], ends[index], depths[index], qualities[index]);
    last = ends[index];
  }
  if (Number.isFinite(last) || silence.rule === "dry") fill(last, Number.POSITIVE_INFINITY);
  return { readings: filled, dryMs };
}
