export {
  type AdjustedFieldInput,
  type FieldAdjuster,
  fieldAdjuster,
} from "./adjusted-field.ts";
export {
  depthAtPoint,
  meanRainShare,
  type PairedPlace,
  type RainShare,
  spanDepthAt,
} from "./at-gauge.ts";
export {
  type Candidate,
  CHOICE_RULE,
  chooseMethod,
  type MethodChoice,
  type ValidatedChoice,
  validateChoice,
  validateMethod,
} from "./choose-method.ts";
export { type CrossValidation, crossValidatedPairs, type HeldOutGauge } from "./cross-validation.ts";
export { CLUSTER_RULE } from "./folds.ts";
export { dominanceNote, type GaugeCounts, whyNoGauge } from "./footing.ts";
export {
  type AppliedBias,
  type FactorBasis,
  type FactorPair,
  type MeanFieldBias,
  type MeanFieldBiasOptions,
  meanFieldBias,
  type RefusedBias,
} from "./mean-field-bias.ts";
export {
  type LearnedMethod,
  learnMethod,
  METHOD_NAMES,
  METHOD_TITLES,
  type MethodName,
  type MethodSettings,
} from "./methods.ts";
export { radarVariogram } from "./radar-variogram.ts";
export type { TrustRule } from "./trials.ts";
export {
  type ErrorInTime,
  type IntervalResidual,
  intervalFactor,
  intervalLogDeviation,
  learnErrorInTime,
  varianceOfMean,
} from "./uncertainty/error-in-time.ts";
export { drawMember, type ErrorMember, type MemberInput } from "./uncertainty/error-member.ts";
export {
  type EchoQuality,
  type ErrorModel,
  type ErrorPlace,
  type ErrorPrior,
  type HeldOutResidual,
  logSpread,
} from "./uncertainty/error-model.ts";
export {
  type AreaCells,
  areaRange,
  type DepthRange,
  intervalRange,
  pointRange,
} from "./uncertainty/intervals.ts";
export { learnErrors } from "./uncertainty/learn-errors.ts";
export { pointToCellVariance, TIP_ROUNDING } from "./uncertainty/point-to-cell.ts";
export { VARIOGRAM_SHAPES, type VariogramModel, type VariogramShape } from "./variogram-model.ts";
export { type GaugePlaces, type GaugeReading, type WindowGauge, windowGauges } from "./window-gauges.ts";
