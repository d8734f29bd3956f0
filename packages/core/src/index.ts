export { bandOfWavelength, RADAR_BANDS, type RadarBand } from "./bands.ts";
export {
  arcDistanceM,
  beamAboveArc,
  beamDiameterM,
  beamHeightM,
  EARTH_RADIUS_M,
  effectiveRadiusFactor,
  effectiveRadiusM,
  type GateGeometry,
  gateGeometry,
  refractivityGradientPerKm,
  STANDARD_RADIUS_FACTOR,
} from "./beam.ts";
export {
  blockageAlongRay,
  blockageCorrectionDb,
  gaussianBlockedFraction,
  uniformBlockedFraction,
} from "./blockage.ts";
export { type CapSetting, CUSTOMARY_CAP_MM_PER_HOUR, type ResolvedCap, resolveCap } from "./cap.ts";
export { errorFunction } from "./error-function.ts";
export * from "./model/catchment.ts";
export * from "./model/errors.ts";
export * from "./model/gauge.ts";
export * from "./model/grid.ts";
export * from "./model/interval.ts";
export * from "./model/pair.ts";
export * from "./model/radar.ts";
export {
  type Codes,
  checkCoding,
  lookUp,
  type MomentCoding,
  momentValue,
  momentValues,
} from "./moment-values.ts";
export { nearestNames } from "./nearest-names.ts";
export {
  gateRate,
  momentRates,
  type RateSettings,
  type Rates,
  rateConverter,
  rateTable,
} from "./rate-table.ts";
export { type PublishedRelation, RELATIONS, type Standing } from "./relation-catalogue.ts";
export {
  findRelation,
  meltedReflectivityDbz,
  rainRateMmPerHour,
  reflectivityDbz,
  relationCaution,
  SNOW_EQUIVALENT_TO_MELTED_DB,
} from "./relations.ts";
export { type DroppedSweep, dropResent, groupIntoRounds, medianRoundMs, type SentSweep } from "./rounds.ts";
export {
  decibels,
  frequencyHz,
  heldDepthMm,
  MM_PER_INCH,
  MS_PER_HOUR,
  MS_PER_MINUTE,
  ratioFromDecibels,
  SPEED_OF_LIGHT_M_PER_S,
  waterFlowM3PerS,
  waterVolumeM3,
  wavelengthM,
  zM3,
  zMm6PerM3,
} from "./units.ts";
export { type Phase, type ZrRelation, zrRelation } from "./zr-relation.ts";
