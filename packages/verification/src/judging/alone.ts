import { type GaugeSeries, type Interval, QUALITY_DROP } from "@rainreckon/core";
import { quantumMm } from "./aligned.ts";

/** Readings running that hold the same depth above 0, from which a logger is taken for stuck. House rule. */
const REPEATED = 6;
/** A value of one tip or two repeats in steady drizzle; above this it does not. */
const STEADY_TIPS = 2;
/** Steady rain repeats a few tips now and then: the radar must contradict the run by this factor. House rule. */
const CONTRADICTED = 2;
/** Time after the rain over which a funnel that drains slowly goes on tipping. House rule. */
const DRAIN_MS = 3 * 3_600_000;

/** Readings running, from the first to the last. */
export interface Run {
  readonly startEpochMs: number;
  readonly endEpochMs: number;
  readonly count: number;
  readonly depthMm: number;
}

interface Reading {
  readonly startEpochMs: number;
  readonly endEpochMs: number;
  readonly depthMm: number;
}

/** Indices [first, last] of the runs in which one depth above 0 is read at least `least` times on end. */
export function repeatedRuns(depthMm: ArrayLike<number>, least: number = REPEATED): [number, number][] {
  const runs: [number, number][] = [];
  let first = 0;
  for (let i = 1; i <= depthMm.length; i++) {
    if (i < depthMm.length && depthMm[i] === depthMm[first]) continue;
    if (depthMm[first] > 0 && i - first >= least) runs.push([first, i - 1]);
    first = i;
  }
  return runs;
}

/** Indices of depths of at least `leastMm` that are more than `factor` times the larger of their neighbours. */
export function isolatedSpikes(depthMm: ArrayLike<number>, leastMm: number, factor: number): number[] {
  const found: number[] = [];
  for (let i = 0; i < depthMm.length; i++) {
    const beside = Math.max(depthMm[i - 1] || 0, depthMm[i + 1] || 0);
    if (depthMm[i] >= leastMm && depthMm[i] > factor * beside) found.push(i);
  }
  return found;
}

/**
 * The longest run of one depth above two tips that the radar contradicts: rain changes, a stuck logger does not.
 *
 * @param tipMm - smallest depth the gauge can tell
 * @param radarMm - radar depth over a time; NaN where not known, which contradicts nothing
 */
export function findRepeatedValue(
  series: GaugeSeries,
  window: Interval,
  tipMm: number,
  radarMm: (span: Interval) => number,
): (Run & { readonly eachMm: number }) | undefined {
  if (series.stepMs === undefined) return undefined;
  const readings = readingsIn(series, window);
  const runs = repeatedRuns(readings.map(({ depthMm }) => depthMm)).filter(
    ([first]) => readings[first].depthMm > STEADY_TIPS * tipMm + 1e-9,
  );
  for (const [first, last] of runs.sort((a, b) => b[1] - b[0] - (a[1] - a[0]))) {
    const run = runOf(readings.slice(first, last + 1));
    const seenMm = radarMm(run);
    if (run.depthMm > CONTRADICTED * seenMm || seenMm > CONTRADICTED * run.depthMm) {
      return { ...run, eachMm: readings[first].depthMm };
    }
  }
  return undefined;
}

/** Readings that are no multiples of the stated tip, where the gauge has one; undefined where there are none. */
export function findOddResolution(
  series: GaugeSeries,
  window: Interval,
  tipMm: number | undefined,
): { readonly odd: number; readonly count: number; readonly quantumMm: number | undefined } | undefined {
  if (tipMm === undefined || !(tipMm > 0)) return undefined;
  const wet = readingsIn(series, window)
    .map(({ depthMm }) => depthMm)
    .filter((mm) => mm > 0);
  const odd = wet.filter((mm) => Math.abs(mm / tipMm - Math.round(mm / tipMm)) > 0.05).length;
  return odd === 0 ? undefined : { odd, count: wet.length, quantumMm: quantumMm(wet) };
}

/** Fastest and most regular tips of a person with a jug: at least so many, in at most so long. House rule. */
const TEST_LEAST_TIPS = 5;
const TEST_LONGEST_MS = 30 * 60_000;

/**
 * Tips in a dry time: a burst of at least five tips within half an hour, with nothing for three hours on either side,
 * and `dry` says that nobody else had rain then.
 */
export function findTestTips(
  series: GaugeSeries,
  window: Interval,
  tipMm: number,
  dry: (span: Interval) => boolean,
): Run | undefined {
  for (const burst of bursts(readingsIn(series, window), DRAIN_MS)) {
    const run = runOf(burst);
    const isShort = run.endEpochMs - run.startEpochMs <= TEST_LONGEST_MS;
    if (!isShort || run.depthMm < TEST_LEAST_TIPS * tipMm - 1e-9) continue;
    if (dry({ startEpochMs: run.startEpochMs - DRAIN_MS, endEpochMs: run.endEpochMs + DRAIN_MS })) return run;
  }
  return undefined;
}

/** Readings of one tip after the rain that make a drip. House rule. */
const LEAST_DRIPS = 5;

/**
 * Single tips, evenly spread, that go on after rain where nobody else has any: a funnel that drains slowly or lets go
 * late, or snow that melts.
 */
export function findLateRelease(
  series: GaugeSeries,
  window: Interval,
  tipMm: number,
  dry: (span: Interval) => boolean,
): Run | undefined {
  const drips = readingsIn(series, window).filter(
    ({ startEpochMs, endEpochMs, depthMm }) =>
      depthMm > 0 && depthMm <= STEADY_TIPS * tipMm + 1e-9 && dry({ startEpochMs, endEpochMs }),
  );
  const longest = bursts(drips, DRAIN_MS).sort((a, b) => b.length - a.length)[0];
  return longest === undefined || longest.length < LEAST_DRIPS ? undefined : runOf(longest);
}

/** Readings with rain in groups with nothing in between for longer than `gapMs`. */
function bursts(readings: readonly Reading[], gapMs: number): Reading[][] {
  const groups: Reading[][] = [];
  for (const reading of readings) {
    if (!(reading.depthMm > 0)) continue;
    const last = groups.at(-1)?.at(-1);
    if (last !== undefined && reading.startEpochMs - last.endEpochMs < gapMs) groups.at(-1)?.push(reading);
    else groups.push([reading]);
  }
  return groups;
}

function runOf(readings: readonly Reading[]): Run {
  return {
    startEpochMs: readings[0].startEpochMs,
    endEpochMs: readings[readings.length - 1].endEpochMs,
    count: readings.length,
    depthMm: readings.reduce((sum, { depthMm }) => sum + depthMm, 0),
  };
}

function readingsIn(series: GaugeSeries, window: Interval): Reading[] {
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
