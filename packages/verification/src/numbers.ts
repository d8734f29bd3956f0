/**
 * Slack of comparisons between depths, mm: 0.1 + 0.2 is not 0.3 in binary, and a gauge that counts tips
 * must not fall below a threshold it reached.
 */
export const DEPTH_SLACK_MM = 1e-9;

/** A quotient that is undefined (NaN), never infinite, where the divisor is 0. */
export function quotient(numerator: number, divisor: number): number {
  return divisor === 0 ? Number.NaN : numerator / divisor;
}

/** A ratio of powers or depths in decibels, 10 log10; NaN for a ratio of 0 or below. */
export function decibels(ratio: number): number {
  return ratio > 0 ? 10 * Math.log10(ratio) : Number.NaN;
}

/** The ratio that a number of decibels stands for. */
export function fromDecibels(db: number): number {
  return 10 ** (db / 10);
}

/** Whether a depth reaches a threshold, within {@link DEPTH_SLACK_MM}. */
export function reaches(depthMm: number, thresholdMm: number): boolean {
  return depthMm >= thresholdMm - DEPTH_SLACK_MM;
}
