import { quotient, reaches } from "./numbers.ts";

/** Depths side by side: pair i is gaugeMm[i] and radarMm[i], mm over the same interval and time. */
export interface DepthPairs {
  readonly gaugeMm: Float64Array;
  readonly radarMm: Float64Array;
}

/**
 * Which pairs a rule keeps at a threshold.
 *
 * Depth scores keep a pair when either side reached the threshold, ratio scores when both did. To
 * select on the gauge alone would make the radar look too dry (regression to the mean), on the
 * radar alone too wet.
 *
 * @param thresholdMm - one threshold for all, or one per pair
 * @returns indices of the kept pairs, ascending
 */
export function keptBy(
  rule: "either" | "both",
  pairs: DepthPairs,
  thresholdMm: number | Float64Array,
): number[] {
  const kept: number[] = [];
  for (let i = 0; i < pairs.gaugeMm.length; i++) {
    const threshold = typeof thresholdMm === "number" ? thresholdMm : thresholdMm[i];
    const gauge = reaches(pairs.gaugeMm[i], threshold);
    const radar = reaches(pairs.radarMm[i], threshold);
    if (rule === "either" ? gauge || radar : gauge && radar) kept.push(i);
  }
  return kept;
}

/** The pairs at some indices. */
export function pick(pairs: DepthPairs, indices: readonly number[]): DepthPairs {
  return {
    gaugeMm: Float64Array.from(indices, (i) => pairs.gaugeMm[i]),
    radarMm: Float64Array.from(indices, (i) => pairs.radarMm[i]),
  };
}

/** Mean of a typed array; NaN when it is empty. */
export function meanOf(values: Float64Array): number {
  return quotient(
    values.reduce((sum, value) => sum + value, 0),
    values.length,
  );
}
