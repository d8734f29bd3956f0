import type { Interval } from "@rainreckon/core";

const MINUTE_MS = 60_000;
const STEP_MS = 5 * MINUTE_MS;
const HOUR_MS = 60 * MINUTE_MS;

/** The part of time that two spans share; undefined where they share none. */
export function commonSpan(a: Interval, b: Interval): Interval | undefined {
  const startEpochMs = Math.max(a.startEpochMs, b.startEpochMs);
  const endEpochMs = Math.min(a.endEpochMs, b.endEpochMs);
  return startEpochMs < endEpochMs ? { startEpochMs, endEpochMs } : undefined;
}

/** The span from the first start to the last end; undefined without any. */
export function wholeSpan(spans: readonly Interval[]): Interval | undefined {
  if (spans.length === 0) return undefined;
  return {
    startEpochMs: Math.min(...spans.map((span) => span.startEpochMs)),
    endEpochMs: Math.max(...spans.map((span) => span.endEpochMs)),
  };
}

/**
 * A span as a window that people would write: its ends on whole five minutes, outward.
 *
 * Of two hours and more, an end that lies within one round of a whole hour goes to that hour, inward too:
 * a storm from 11:59:40 to 18:03:10 in five-minute rounds is the window 12:00 to 18:00.
 *
 * @param roundMs - usual time between rounds
 */
export function roundedWindow(span: Interval, roundMs: number): Interval {
  const long = span.endEpochMs - span.startEpochMs >= 2 * HOUR_MS;
  const nearHour = (epochMs: number) => {
    const hour = Math.round(epochMs / HOUR_MS) * HOUR_MS;
    return long && Math.abs(epochMs - hour) <= roundMs ? hour : undefined;
  };
  return {
    startEpochMs: nearHour(span.startEpochMs) ?? Math.floor(span.startEpochMs / STEP_MS) * STEP_MS,
    endEpochMs: nearHour(span.endEpochMs) ?? Math.ceil(span.endEpochMs / STEP_MS) * STEP_MS,
  };
}

/** Below this share of the radars' time, the gauges' time is not taken for the window: it looks like another storm or a wrong zone. */
const MIN_SHARE = 0.8;

/**
 * The window that radars and gauges have in common, or the radars' own where the gauges cover too little of it.
 */
export function chooseWindow(
  radars: Interval,
  gauges: Interval | undefined,
  roundMs: number,
): { readonly window: Interval; readonly basis: "radars and gauges" | "radars" } {
  const common = gauges === undefined ? undefined : commonSpan(radars, gauges);
  const length = (span: Interval) => span.endEpochMs - span.startEpochMs;
  if (common !== undefined && length(common) >= MIN_SHARE * length(radars)) {
    return { window: roundedWindow(common, roundMs), basis: "radars and gauges" };
  }
  return { window: roundedWindow(radars, roundMs), basis: "radars" };
}
