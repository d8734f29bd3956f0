import { choleskyInPlace, solveLowerInPlace } from "../cholesky.ts";
import {
  type ErrorModel,
  gaugeLogVariance,
  type HeldOutResidual,
  logError,
  ownSpread,
} from "./error-model.ts";

/** Ranges that are tried, km, and how far they may be from what is expected, in logarithms. House rules. */
const TRIED_KM = [1, 1.5, 2, 3, 4, 6, 8, 11, 15, 20, 30, 40, 60, 80];
const LOG_SPREAD = 0.45;
/** More residuals than this are thinned evenly. */
const MOST_RESIDUALS = 200;

/**
 * Distance over which errors are alike, km: the range of an exponential correlation, of largest posterior density
 * under standardised residuals. The gauges' own error is a nugget of known size.
 *
 * @param model - its own range is what is expected, and stands where residuals cannot tell
 */
export function errorRangeKm(model: ErrorModel, residuals: readonly HeldOutResidual[]): number {
  const expectedKm = model.rangeKm;
  const step = Math.ceil(residuals.length / MOST_RESIDUALS);
  const used = residuals.filter((_, i) => i % step === 0);
  const n = used.length;
  if (n < 3) return expectedKm;
  const own = used.map((residual) => ownSpread(model, residual) ** 2);
  const all = used.map((residual, i) => own[i] + gaugeLogVariance(residual));
  const standardised = used.map(
    (residual, i) => (logError(residual) - model.medianLogError) / Math.sqrt(all[i]),
  );
  // Lone wild residuals say nothing of distance.
  const values = standardised.map((value) => Math.max(-2.5, Math.min(2.5, value)));
  let best = expectedKm;
  let least = Number.POSITIVE_INFINITY;
  for (const rangeKm of TRIED_KM) {
    const matrix = new Float64Array(n * n);
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < i; j++) {
        const distance = Math.hypot(used[i].xKm - used[j].xKm, used[i].yKm - used[j].yKm);
        matrix[i * n + j] = Math.exp(-distance / rangeKm) * Math.sqrt((own[i] * own[j]) / (all[i] * all[j]));
      }
      matrix[i * n + i] = 1 + 1e-9;
    }
    if (!choleskyInPlace(matrix, n)) continue;
    const whitened = Float64Array.from(values);
    solveLowerInPlace(matrix, n, whitened);
    let cost = 0.5 * (Math.log(rangeKm / expectedKm) / LOG_SPREAD) ** 2;
    for (let i = 0; i < n; i++) cost += Math.log(matrix[i * n + i]) + 0.5 * whitened[i] ** 2;
    if (cost < least) {
      least = cost;
      best = rangeKm;
    }
  }
  return best;
}
