export { type ArealDepth, type ArealSource, arealDepth, type CellFractions, cellFractions } from "./areal.ts";
export { type BlendedStep, blendStep } from "./blend.ts";
export {
  BRIDGED_ABOVE_ROUNDS,
  type FieldShape,
  type LayerPlace,
  RadarIntegrator,
  type RadarStep,
  type Stretch,
  stretchDepthMm,
  type TimeRules,
} from "./integrate.ts";
export { FieldSum, type IntervalFields, type TotalPlanes, totalPlanes } from "./interval-sum.ts";
export { type Isohyet, isohyetLevels, isohyets } from "./isohyet.ts";
export { cellsForPoint, pointDepth } from "./point.ts";
export { clockZone, type RainDay, type RainDayRule, rainDays } from "./rain-day.ts";
export { cutWindow, durationMs } from "./steps.ts";
