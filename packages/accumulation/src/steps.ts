import type { Interval } from "@rainreckon/core";

const HOUR_MS = 3_600_000;
const DAY_MS = 24 * HOUR_MS;

/**
 * Milliseconds of an ISO 8601 duration of days, hours, minutes and seconds ("PT5M", "PT1H", "P1D").
 * A day here is 24 hours; a civil day that may have 23 or 25 is a rain day, see `rainDays`.
 *
 * @returns NaN for anything else, and for a duration of 0
 */
export function durationMs(iso: string): number {
  const parts = /^P(?:(\d+)D)?(?:T(?:(\d+)H)?(?:(\d+)M)?(?:(\d+)S)?)?$/.exec(iso);
  if (parts === null) return Number.NaN;
  const [days, hours, minutes, seconds] = parts.slice(1).map((part) => Number(part ?? 0));
  const ms = days * DAY_MS + hours * HOUR_MS + minutes * 60_000 + seconds * 1000;
  return ms > 0 ? ms : Number.NaN;
}

/**
 * A window cut at the whole multiples of a step, counted from an anchor: hours begin at full hours UTC
 * wherever the window begins, and its first and last piece may be shorter.
 *
 * @param anchorEpochMs - an instant on which a piece begins or ends; 1970-01-01T00:00Z where left out
 * @throws RangeError where the window is empty or the step not above 0
 */
export function cutWindow(window: Interval, stepMs: number, anchorEpochMs = 0): Interval[] {
  const { startEpochMs, endEpochMs } = window;
  if (!(endEpochMs > startEpochMs) || !(stepMs > 0)) {
    throw new RangeError(`cannot cut (${startEpochMs}, ${endEpochMs}] into steps of ${stepMs} ms`);
  }
  const pieces: Interval[] = [];
  let from = startEpochMs;
  while (from < endEpochMs) {
    const to = Math.min(
      endEpochMs,
      anchorEpochMs + (Math.floor((from - anchorEpochMs) / stepMs) + 1) * stepMs,
    );
    pieces.push({ startEpochMs: from, endEpochMs: to });
    from = to;
  }
  return pieces;
}
