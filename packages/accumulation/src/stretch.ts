import { type Interval, MS_PER_HOUR } from "@rainreckon/core";

/** A stretch between two scans is called bridged when it is longer than this many median rounds: a scan is missing. */
export const BRIDGED_ABOVE_ROUNDS = 1.5;

/** A stretch of time a radar speaks for at one cell, with its rates at both ends. */
export interface Stretch {
  readonly fromEpochMs: number;
  readonly toEpochMs: number;
  readonly rate0: number;
  readonly rate1: number;
  /** bridged: a scan is missing in it; edge: before the first scan or after the last. */
  readonly kind: "usual" | "bridged" | "edge";
}

/** A part of a stretch that falls into one step: what its ends count for in it, in hours, and its length. */
export interface Part {
  readonly step: number;
  readonly hours0: number;
  readonly hours1: number;
  readonly ms: number;
}

/** Depth of a linear change of rate over [from, to] inside [start, end]: the trapezoid of its ends. */
export function trapezoidHours(
  start: number,
  end: number,
  from: number,
  to: number,
): { hours0: number; hours1: number; ms: number } {
  const ms = to - from;
  const length = end - start;
  const middle = length > 0 ? (from + to - 2 * start) / (2 * length) : 0.5;
  return { hours0: (ms * (1 - middle)) / MS_PER_HOUR, hours1: (ms * middle) / MS_PER_HOUR, ms };
}

/** Depth in mm of a stretch over its part in (from, to]. */
export function stretchDepthMm(stretch: Stretch, from: number, to: number): number {
  const { hours0, hours1 } = trapezoidHours(stretch.fromEpochMs, stretch.toEpochMs, from, to);
  return hours0 * stretch.rate0 + hours1 * stretch.rate1;
}

/**
 * The parts of a stretch in the steps that are not done yet.
 *
 * @param steps - contiguous, in time order
 * @param firstOpen - first step that is not done
 */
export function partsOf(steps: readonly Interval[], firstOpen: number, from: number, to: number): Part[] {
  const parts: Part[] = [];
  for (let step = firstOpen; step < steps.length; step++) {
    const { startEpochMs, endEpochMs } = steps[step];
    if (startEpochMs >= to) break;
    const begin = Math.max(from, startEpochMs);
    const end = Math.min(to, endEpochMs);
    if (end > begin) parts.push({ step, ...trapezoidHours(from, to, begin, end) });
  }
  return parts;
}
