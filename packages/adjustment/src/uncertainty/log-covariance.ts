import type { ErrorModel } from "./error-model.ts";

/**
 * Share of the variance that all places have in common: a factor, or a mean of residuals, is off everywhere alike.
 * Some 27 gauges know a mean to within a fifth of their own spread, which is a share of 0.04. House rule.
 */
export const COMMON_SHARE = 0.05;

/**
 * Correlation of the errors that residuals show at a distance: an exponential one, and what all places have in
 * common.
 */
export function errorCorrelation({ rangeKm }: ErrorModel, distanceKm: number): number {
  return COMMON_SHARE + (1 - COMMON_SHARE) * Math.exp(-distanceKm / rangeKm);
}

/**
 * Covariance of the logarithms of truth over estimate at two places: what is wrong with all gauges is shared wholly,
 * the rest by distance.
 *
 * @param a - spread at the one place, as `logSpread` gives it
 * @param b - at the other
 */
export function logCovariance(model: ErrorModel, a: number, b: number, distanceKm: number): number {
  const gauges = model.gaugesSpread ** 2;
  const own = Math.sqrt(Math.max(0, a * a - gauges) * Math.max(0, b * b - gauges));
  return gauges + own * errorCorrelation(model, distanceKm);
}
