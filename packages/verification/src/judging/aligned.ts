import type { Interval } from "@rainreckon/core";
import type { GaugeEvidence } from "../evidence.ts";
import { gaugeSteps } from "../gauge-steps.ts";

/** Steps on which gauge and radar are held together: shorter ones show when a scan was taken rather than rain. House rule. */
const LEAST_STEP_MS = 10 * 60_000;
/** Longest shift of a clock that is looked for: that of a zone far off is seen by its hours. House rule. */
export const MOST_LAG_MS = 3 * 3_600_000;
/** Share of a step that each side must have observed. */
const WHOLE = 0.95;

/** Tip of a gauge of which nothing is known: the commonest one (common practice). */
const USUAL_TIP_MM = 0.2;
/** Readings with rain from which a quantum can be told; parts of the smallest one that are tried. */
const LEAST_READINGS = 4;
const MOST_PARTS = 5;
const LEAST_QUANTUM_MM = 0.002;
/** How far from a whole number of quanta a reading may be, and the share of readings that may be farther. */
const QUANTUM_SLACK = 0.02;
const MOST_SLACK = 0.2;
/** The smallest reading, which the quantum is taken from, was rounded: a tip of 0.00787 in. is written as 0.0079. */
const ROUNDING = 0.01;
const ODD_SHARE = 0.05;

/** A gauge beside the radar, on common steps. Steps of the gauge reach beyond the window, so that a shifted clock can be met. */
export interface Aligned {
  readonly evidence: GaugeEvidence;
  readonly stepMs: number;
  readonly startEpochMs: number;
  /** The radar's base step with which the window begins. */
  readonly firstBase: number;
  /** Steps of the window. */
  readonly count: number;
  /** Steps of `gaugeMm` before the window. */
  readonly lead: number;
  /** Shape [lead + count + lead]: mm; NaN where the gauge did not observe the whole step. */
  readonly gaugeMm: Float64Array;
  /** Shape [count]: mm; NaN where the radar did not. */
  readonly radarMm: Float64Array;
  /** Smallest depth the gauge can tell, mm. */
  readonly tipMm: number;
}

/**
 * Puts gauge and radar on common steps: of at least ten minutes, whole steps of the radar, and long enough for a reading.
 *
 * @returns undefined where the gauge's readings are longer than an hour: too coarse to follow rain
 */
export function aligned(evidence: GaugeEvidence, window: Interval): Aligned | undefined {
  const { series, radar } = evidence;
  const readingMs = series.stepMs ?? 0;
  if (readingMs > 3_600_000) return undefined;
  const perStep = Math.max(1, Math.ceil(Math.max(LEAST_STEP_MS, readingMs) / radar.stepMs));
  const stepMs = perStep * radar.stepMs;
  const count = Math.floor((window.endEpochMs - window.startEpochMs) / stepMs);
  if (count < 1) return undefined;
  const firstBase = Math.round((window.startEpochMs - radar.startEpochMs) / radar.stepMs);
  const lead = Math.ceil(MOST_LAG_MS / stepMs);
  const steps = gaugeSteps(series, window.startEpochMs - lead * stepMs, stepMs, count + 2 * lead);
  const gaugeMm = steps.depthMm.map((mm, k) => (steps.observedFraction[k] >= WHOLE ? mm : Number.NaN));
  return {
    evidence,
    stepMs,
    count,
    lead,
    gaugeMm,
    radarMm: radarOnSteps(evidence, perStep, count, firstBase),
    firstBase,
    startEpochMs: window.startEpochMs,
    tipMm: quantumMm(series.depthMm) ?? Math.max(series.resolutionMm ?? 0, usualTipMm(series.depthMm)),
  };
}

/** A tip as most gauges have, where readings tell of none; but what has written less can tell less. */
function usualTipMm(depthMm: ArrayLike<number>): number {
  return Array.from(depthMm).reduce((least, mm) => (mm > 0 && mm < least ? mm : least), USUAL_TIP_MM);
}

/**
 * What all readings of a gauge are multiples of: its tip, also where values are written with more digits.
 *
 * @returns undefined for fewer than four readings with rain, or where they have no such quantum
 */
export function quantumMm(depthMm: ArrayLike<number>): number | undefined {
  const wet = Array.from(depthMm).filter((mm) => mm > 0 && Number.isFinite(mm));
  if (wet.length < LEAST_READINGS) return undefined;
  const smallest = wet.reduce((least, mm) => Math.min(least, mm), Number.POSITIVE_INFINITY);
  for (let parts = 1; parts <= MOST_PARTS; parts++) {
    const quantum = smallest / parts;
    if (quantum < LEAST_QUANTUM_MM) return undefined;
    const isOdd = (mm: number) => {
      const whole = Math.round(mm / quantum);
      return Math.abs(mm / quantum - whole) > Math.min(MOST_SLACK, QUANTUM_SLACK + ROUNDING * whole);
    };
    const odd = wet.filter(isOdd).length;
    if (odd <= ODD_SHARE * wet.length) return quantum;
  }
  return undefined;
}

/** The gauge's steps of the window alone. */
export function gaugeInWindow({ gaugeMm, lead, count }: Aligned): Float64Array {
  return gaugeMm.subarray(lead, lead + count);
}

/** Radar depths on steps of `perStep` base steps, from a base step on. */
export function radarOnSteps(
  { radar }: Pick<GaugeEvidence, "radar">,
  perStep: number,
  count: number,
  firstBase: number,
): Float64Array {
  const depths = new Float64Array(count);
  for (let step = 0; step < count; step++) {
    let sum = 0;
    for (let k = 0; k < perStep; k++) {
      const base = firstBase + step * perStep + k;
      sum += radar.observedFraction[base] >= WHOLE ? radar.depthMm[base] : Number.NaN;
    }
    depths[step] = sum;
  }
  return depths;
}

/** Depths of a place of the field on the steps of a gauge. */
export function fieldOnSteps(
  depthMm: ArrayLike<number>,
  perStep: number,
  count: number,
  firstBase: number,
): Float64Array {
  const depths = new Float64Array(count);
  for (let step = 0; step < count; step++) {
    for (let k = 0; k < perStep; k++) depths[step] += depthMm[firstBase + step * perStep + k];
  }
  return depths;
}
