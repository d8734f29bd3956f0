import { type ErrorModel, type ErrorPrior, fitSpread, type HeldOutResidual } from "./error-model.ts";
import { errorRangeKm } from "./error-range.ts";

/**
 * The model of the error of an estimate from residuals at gauges that had no part in it: the spread, then the distance
 * over which errors are alike, as standardised residuals show it.
 *
 * @param residuals - any number, none too; depths of NaN are passed over
 */
export function learnErrors(residuals: readonly HeldOutResidual[], prior: ErrorPrior): ErrorModel {
  const known = residuals.filter(({ depthMm, gaugeMm }) => depthMm >= 0 && gaugeMm >= 0);
  const model = fitSpread(known, prior);
  return { ...model, rangeKm: errorRangeKm(model, known) };
}
