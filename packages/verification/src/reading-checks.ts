import { type GaugeSeries, type Interval, QUALITY_DROP } from "@rainreckon/core";
import type { RadarSteps } from "./pairs.ts";

/**
 * Depths that no reading of that length can hold, mm by minutes: above every rain on record.
 * House rule of this project, set at the class of the world records (which are from memory).
 */
const IMPOSSIBLE_MM: readonly (readonly [minutes: number, depthMm: number])[] = [
  [1, 40],
  [5, 100],
  [10, 150],
  [60, 401],
  [1440, 1825],
];

/** A reading that stands out, and why. */
export interface ReadingFinding {
  readonly startEpochMs: number;
  readonly endEpochMs: number;
  readonly depthMm: number;
  readonly limitMm: number;
}

/** Largest depth that a reading of a length can hold before it is taken for impossible, mm; Infinity beyond a day. */
export function impossibleDepthMm(minutes: number): number {
  const limit = IMPOSSIBLE_MM.find(([length]) => minutes <= length);
  return limit === undefined ? Number.POSITIVE_INFINITY : limit[1];
}

/** The first reading of a window that is negative or above {@link impossibleDepthMm}. */
export function findImpossibleReading(series: GaugeSeries, window: Interval): ReadingFinding | undefined {
  for (const reading of usableReadings(series, window)) {
    const limitMm = impossibleDepthMm((reading.endEpochMs - reading.startEpochMs) / 60_000);
    if (reading.depthMm < 0 || reading.depthMm > limitMm) return { ...reading, limitMm };
  }
  return undefined;
}

/** Longest reading that can be told apart as a single spike. */
const SPIKE_MAX_MS = 15 * 60_000;
/** How far before and after a reading the radar may have seen its rain. */
const AROUND_MS = 15 * 60_000;
const SPIKE_MIN_MM = 5;
const SPIKE_FACTOR = 10;
/** A rate that only a handful of bursts on record reach; from here on less contradiction by the radar is enough. House rule. */
const EXTREME_MM_PER_HOUR = 300;
const EXTREME_FACTOR = 3;

/**
 * A single reading that neither the readings beside it nor the radar know of.
 *
 * It is of at least 5 mm, more than ten times the larger of its two neighbours in time (house rule of
 * this project), and more than ten times what the radar saw over the gauge in the half hour
 * around it; three times is enough of both at a rate above 300 mm/h. The radar's say keeps a true burst from being
 * taken for a fault: it sees at least a part of it.
 *
 * @param radar - the radar over the gauge
 */
export function findSpike(
  series: GaugeSeries,
  window: Interval,
  radar: RadarSteps,
): (ReadingFinding & { readonly radarMm: number }) | undefined {
  const readings = usableReadings(series, window);
  for (let i = 0; i < readings.length; i++) {
    const reading = readings[i];
    if (reading.depthMm < SPIKE_MIN_MM || reading.endEpochMs - reading.startEpochMs > SPIKE_MAX_MS) continue;
    const beside = Math.max(readings[i - 1]?.depthMm ?? 0, readings[i + 1]?.depthMm ?? 0);
    const rate = (3_600_000 * reading.depthMm) / (reading.endEpochMs - reading.startEpochMs);
    const factor = rate > EXTREME_MM_PER_HOUR ? EXTREME_FACTOR : SPIKE_FACTOR;
    if (reading.depthMm <= factor * beside) continue;
    const radarMm = radarAround(radar, reading);
    if (reading.depthMm > factor * radarMm) return { ...reading, limitMm: factor * radarMm, radarMm };
  }
  return undefined;
}

/** Radar depth within a quarter of an hour of a reading; NaN, which nothing exceeds, where a step of it was not observed. */
function radarAround(
  { startEpochMs, stepMs, depthMm, observedFraction }: RadarSteps,
  reading: Reading,
): number {
  const first = Math.max(0, Math.floor((reading.startEpochMs - AROUND_MS - startEpochMs) / stepMs));
  const end = Math.min(depthMm.length, Math.ceil((reading.endEpochMs + AROUND_MS - startEpochMs) / stepMs));
  let sum = end > first ? 0 : Number.NaN;
  for (let step = first; step < end; step++) {
    sum += observedFraction[step] > 0 ? depthMm[step] : Number.NaN;
  }
  return sum;
}

interface Reading {
  readonly startEpochMs: number;
  readonly endEpochMs: number;
  readonly depthMm: number;
}

function usableReadings(series: GaugeSeries, window: Interval): Reading[] {
  const readings: Reading[] = [];
  for (let i = 0; i < series.depthMm.length; i++) {
    const startEpochMs = series.startEpochMs[i];
    const endEpochMs = series.endEpochMs[i];
    if (endEpochMs <= window.startEpochMs || startEpochMs >= window.endEpochMs) continue;
    if (series.quality[i] === QUALITY_DROP || Number.isNaN(series.depthMm[i])) continue;
    readings.push({ startEpochMs, endEpochMs, depthMm: series.depthMm[i] });
  }
  return readings;
}
