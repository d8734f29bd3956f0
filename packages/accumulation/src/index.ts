export { type ArealDepth, type ArealSource, arealDepth, type CellFractions, cellFractions } from "./areal.ts";
export { type BlendedStep, blendStep, type RadarInStep, StepBlender } from "./blend.ts";
export { type Contribution, contributionsAt } from "./contributions.ts";
export {
  type AreaMaximum,
  depthAreaDuration,
  type IntervalDepths,
  meanRateMmPerHour,
  type StormCentre,
  stormCentre,
  USUAL_AREAS_KM2,
} from "./depth-area-duration.ts";
export {
  type DurationMaximum,
  type DurationOptions,
  durationMaxima,
  fixedToSlidingRatio,
  type NoMaximum,
  USUAL_DURATIONS_MS,
} from "./depth-duration.ts";
export {
  annualFromPartial,
  arealReduction,
  depthsAtDuration,
  frequencyDepthMm,
  inSeries,
  partialFromAnnual,
  periodOfVariate,
  type ReturnPeriod,
  reducedVariate,
  returnPeriod,
  type TableColumn,
} from "./frequency.ts";
export { type LayerPlace, type LayerStretch, RadarIntegrator, type TimeRules } from "./integrate.ts";
export { FieldSum, type IntervalFields, type TotalPlanes, totalPlanes } from "./interval-sum.ts";
export { type Isohyet, isohyetLevels, isohyets } from "./isohyet.ts";
export { cellsForPoint, pointDepth } from "./point.ts";
export type { FieldShape, RadarStep } from "./radar-step.ts";
export { clockZone, type RainDay, type RainDayRule, rainDays } from "./rain-day.ts";
export {
  type EventRule,
  type RainEvent,
  type RainEvents,
  rainEvents,
} from "./rain-events.ts";
export {
  allSteps,
  antecedentDepth,
  depthOfSteps,
  type RainSeries,
  type SpanDepth,
  type StepRange,
  spanOfSteps,
  volumeM3,
} from "./rain-series.ts";
export { changeSteps, roundKeepingSum } from "./step-change.ts";
export { cutWindow, durationMs } from "./steps.ts";
export { BRIDGED_ABOVE_ROUNDS, type Stretch, stretchDepthMm } from "./stretch.ts";
