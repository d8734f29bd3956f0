export { type CrossValidation, crossValidate, type HeldOutGauge } from "./cross-validation.ts";
export {
  type AppliedBias,
  applyFactor,
  type FactorBasis,
  type FactorPair,
  factorFromSums,
  type GaugeSum,
  type LimitedFactor,
  type MeanFieldBias,
  type MeanFieldBiasOptions,
  meanFieldBias,
  NO_TOTAL_STANDARD_ERROR,
  type RefusedBias,
  sumsByGauge,
} from "./mean-field-bias.ts";
