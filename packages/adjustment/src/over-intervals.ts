import type { Interval } from "@rainreckon/core";
import type { LearnedMethod } from "./methods.ts";
import type { WindowGauge } from "./window-gauges.ts";

/** Gauges and summed depth from which an interval can speak for itself; else the window speaks for it. House rules. */
const LEAST_GAUGES = 5;
const LEAST_SUM_MM = 5;

/** Depth at a place in an interval, mm, from its radar depth. */
export type IntervalDepth = (xKm: number, yKm: number, radarMm: number, rangeKm: number) => number;

/**
 * A method that learns each interval by itself: for errors that change from hour to hour, at the price of fewer
 * millimetres to learn from, and of steps where one interval ends. Intervals with too little rain at gauges take the
 * field of the window, with the radar's shape in time.
 *
 * @param learn - the method, on the window's gauges or on those of one interval
 */
export function overIntervals(
  gauges: readonly WindowGauge[],
  window: Interval,
  intervalMs: number,
  learn: (gauges: readonly WindowGauge[]) => LearnedMethod,
): LearnedMethod {
  const whole = learn(gauges);
  if (whole.kind === "factor") return whole;
  const parts = new Map<number, IntervalDepth>();
  let count = 0;
  for (let startEpochMs = window.startEpochMs; startEpochMs < window.endEpochMs; startEpochMs += intervalMs) {
    count++;
    const own = duringInterval(gauges, { startEpochMs, endEpochMs: startEpochMs + intervalMs });
    const sumMm = own.reduce((sum, { gaugeMm }) => sum + gaugeMm, 0);
    if (own.length < LEAST_GAUGES || sumMm < LEAST_SUM_MM) continue;
    const learned = learn(own);
    if (learned.kind === "field") parts.set(startEpochMs, learned.depthMm);
  }
  const left = count - parts.size;
  const note = `${left} of ${count} intervals had too little rain at gauges: the field of the window in its place`;
  return {
    ...whole,
    notes: left > 0 ? [...whole.notes, note] : whole.notes,
    ofInterval: ({ startEpochMs, endEpochMs }) =>
      endEpochMs - startEpochMs === intervalMs ? parts.get(startEpochMs) : undefined,
  };
}

/** The gauges as they were during one interval, those with a reading of it. */
function duringInterval(
  gauges: readonly WindowGauge[],
  { startEpochMs, endEpochMs }: Interval,
): WindowGauge[] {
  return gauges.flatMap((gauge) => {
    const reading = gauge.readings.find(
      (one) => one.startEpochMs === startEpochMs && one.endEpochMs === endEpochMs,
    );
    if (reading === undefined) return [];
    const { gaugeMm, radarMm } = reading;
    const { radarTotalMm, radarPointTotalMm } = gauge;
    const radarPointMm = radarTotalMm > 0 ? (radarMm * radarPointTotalMm) / radarTotalMm : radarMm;
    return [
      {
        ...gauge,
        gaugeMm,
        radarMm,
        radarTotalMm: radarMm,
        radarPointMm,
        radarPointTotalMm: radarPointMm,
        readings: [reading],
      },
    ];
  });
}
