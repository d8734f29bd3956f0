import type { Interval } from "@rainreckon/core";

/** Rain at one place or over one area, in even steps from a start. Shapes [steps]. */
export interface RainSeries {
  readonly startEpochMs: number;
  readonly stepMs: number;
  /** Depth over the part of the step that was observed; NaN where nothing was, never 0 for missing. */
  readonly depthMm: Float64Array;
  /** Share of the step (and area) that was observed, 0 to 1. */
  readonly observedFraction: Float64Array;
  /** 1 where a rate at the hail cap went into the step, else 0. */
  readonly atCap: Uint8Array;
}

/** A run of steps of a series: from is included, to is excluded. */
export interface StepRange {
  readonly from: number;
  readonly to: number;
}

/** What was seen of a span of time. */
export interface SpanDepth extends Interval {
  /** From the part observed: a lower bound where observedFraction is below 1. NaN where nothing was. */
  readonly depthMm: number;
  readonly observedFraction: number;
  /** Whether a step with rain at the cap is among it. */
  readonly atCap: boolean;
}

/** The whole of a series. */
export function allSteps({ depthMm }: RainSeries): StepRange {
  return { from: 0, to: depthMm.length };
}

/** The span of time that steps cover. */
export function spanOfSteps({ startEpochMs, stepMs }: RainSeries, { from, to }: StepRange): Interval {
  return { startEpochMs: startEpochMs + from * stepMs, endEpochMs: startEpochMs + to * stepMs };
}

/**
 * Sums steps. Steps before the first or after the last of the series were not observed, and count so.
 *
 * @param range - whole steps, not empty; may reach beyond the series
 */
export function depthOfSteps(series: RainSeries, range: StepRange): SpanDepth {
  const last = Math.min(range.to, series.depthMm.length);
  let depthMm = Number.NaN;
  let observed = 0;
  let atCap = false;
  for (let k = Math.max(0, range.from); k < last; k++) {
    const mm = series.depthMm[k];
    if (Number.isNaN(mm)) continue;
    depthMm = Number.isNaN(depthMm) ? mm : depthMm + mm;
    observed += series.observedFraction[k];
    if (series.atCap[k] === 1 && mm > 0) atCap = true;
  }
  return {
    ...spanOfSteps(series, range),
    depthMm,
    observedFraction: Math.min(1, observed / (range.to - range.from)),
    atCap,
  };
}

/**
 * Rain in the time before an instant: how wet it was already.
 *
 * @param beforeEpochMs - on a border of steps
 * @param lengthMs - a whole number of steps
 * @returns observedFraction counts time before the series as not observed
 */
export function antecedentDepth(series: RainSeries, beforeEpochMs: number, lengthMs: number): SpanDepth {
  const to = Math.round((beforeEpochMs - series.startEpochMs) / series.stepMs);
  return depthOfSteps(series, { from: to - Math.round(lengthMs / series.stepMs), to });
}

/** Volume of a depth over an area: 1 mm on 1 km² is 1000 m³. */
export function volumeM3(depthMm: number, areaKm2: number): number {
  return depthMm * areaKm2 * 1000;
}
