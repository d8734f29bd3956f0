export {
  antennaGainDb,
  beamPatternDb,
  beamWidthOfDishDeg,
  beamWidthOfGainDeg,
  gaussianBeamGainDb,
  TWO_WAY_WIDTH_RATIO,
} from "./antenna.ts";
export {
  type Air,
  airAbove,
  airOf,
  checkSurfaceAir,
  REFERENCE_SURFACE,
  type SurfaceAir,
  saturationDensityGPerM3,
  vapourPressureHPa,
} from "./atmosphere.ts";
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
export { rateFactorOfErrorDb } from "./calibration-error.ts";
export { type CapSetting, CUSTOMARY_CAP_MM_PER_HOUR, type ResolvedCap, resolveCap } from "./cap.ts";
export {
  type Complex,
  dielectricFactor,
  equivalentOffsetDb,
  ICE_DIELECTRIC_FACTOR,
  refractiveIndex,
  WATER_DIELECTRIC_FACTOR,
  waterPermittivity,
} from "./dielectric.ts";
export {
  type DropSpectrum,
  diameterAtShareMm,
  dropSpectrum,
  marshallPalmerSpectrum,
  massWeightedDiameterMm,
  normalisedSpectrum,
  RAIN_RATE_PER_D3,
  shareBelow,
  spectrumMoment,
  spectrumRateMmPerHour,
  spectrumZMm6PerM3,
  waterContentGPerM3,
  waterOfEqualDropsGPerM3,
  zOfEqualDropsMm6PerM3,
} from "./drop-sizes.ts";
export {
  type AttenuationMethod,
  type AttenuationSettings,
  attenuationLawOfWavelength,
  DEFAULT_ATTENUATION_SETTINGS,
} from "./echo/attenuation/attenuation-settings.ts";
export { type AttenuationReport, correctAttenuation } from "./echo/attenuation/correct-attenuation.ts";
export {
  correctGas,
  GasLosses,
  type GasMode,
  type GasReport,
  referenceAirAt,
  type StationAir,
  surfaceAirOf,
} from "./echo/attenuation/correct-gas.ts";
export {
  type GateShare,
  gateByGateLossTwoWayDb,
  hitschfeldBordanBracket,
  hitschfeldBordanErrorDb,
  lossOfBracketTwoWayDb,
  runawayLossTwoWayDb,
} from "./echo/attenuation/hitschfeld-bordan.ts";
export type { LearnedAttenuation } from "./echo/attenuation/learned.ts";
export {
  DEFAULT_LOSS_LEARNER_SETTINGS,
  LossCoefficientLearner,
  type LossEstimate,
  type LossLearnerSettings,
} from "./echo/attenuation/loss-coefficient-learner.ts";
export {
  lossOfPhaseTwoWayDb,
  type PhaseCoefficient,
  type PhaseCoefficients,
  phaseCoefficients,
} from "./echo/attenuation/phase-coefficients.ts";
export { DEFAULT_PHASE_SETTINGS, type PhaseSettings } from "./echo/attenuation/phase-gates.ts";
export { type PhaseReport, workUpPhase } from "./echo/attenuation/rain-phase.ts";
export {
  type LossEvidence,
  type SettledLoss,
  settleLossCoefficients,
} from "./echo/attenuation/settle-loss-coefficients.ts";
export { DEFAULT_KDP_SETTINGS, type KdpSettings } from "./echo/attenuation/specific-phase.ts";
export { type SystemPhase, SystemPhaseLearner } from "./echo/attenuation/system-phase.ts";
export { zphiAttenuationOneWayDbPerKm, zphiConstant, zphiLossTwoWayDb } from "./echo/attenuation/zphi.ts";
export {
  BlockageLearner,
  type LearnedBlockage,
  type LearnedSweepBlockage,
} from "./echo/blockage/blockage-learner.ts";
export {
  BLOCKAGE_SETTINGS,
  type BlockageSettings,
  correctBlockage,
  type JoinedBlockage,
  joinBlockage,
} from "./echo/blockage/correct-blockage.ts";
export { type BlockedSweep, terrainBlockage } from "./echo/blockage/terrain-blockage.ts";
export { type TerrainGrid, type TerrainRays, terrainCaution } from "./echo/blockage/terrain-model.ts";
export { type ConsistencyEstimate, ConsistencyLearner } from "./echo/calibration/consistency-learner.ts";
export { type OblateEcho, oblateEcho } from "./echo/calibration/drop-phase.ts";
export {
  attenuationLine,
  type LearnedAlpha,
  type LearnedFactor,
  learnAttenuationFromOverlap,
  learnFactorFromOverlap,
} from "./echo/calibration/overlap-attenuation.ts";
export {
  type Estimate,
  type OverlapCoefficients,
  type OverlapDifference,
  overlapDifference,
} from "./echo/calibration/overlap-difference.ts";
export { type OverlapPairs, turned } from "./echo/calibration/overlap-pairs.ts";
export {
  type CalibrationProposal,
  type CalibrationWord,
  type GaugeEvidence,
  proposeCalibration,
  type RadarEvidence,
} from "./echo/calibration/propose-calibration.ts";
export {
  EchoChain,
  type EchoReport,
  type EchoSettings,
  type LearnedEcho,
  NOTHING_LEARNED,
} from "./echo/chain.ts";
export {
  addEffect,
  ECHO_MOMENTS,
  EFFECTS,
  type Effect,
  MARKS,
  type Mark,
  type MeasuredEcho,
  markBit,
  measuredEcho,
  type PolarEcho,
  polarEcho,
  SCREENS,
  type Screen,
  screenBit,
} from "./echo/polar-echo.ts";
export {
  correctProfile,
  PROFILE_BAND_M,
  PROFILE_DEFAULTS,
  type ProfileReport,
  type ProfileSettings,
} from "./echo/profile/correct-profile.ts";
export type { BeamSettings } from "./echo/profile/gate-table.ts";
export type { LearnedProfile, MeltingCorrelation, MeltingLayer } from "./echo/profile/learned-profile.ts";
export { layerBelowFreezing, MeltingLayerLearner } from "./echo/profile/melting-layer.ts";
export { ProfileLearner } from "./echo/profile/profile-learner.ts";
export {
  beamProfileDb,
  beamSigmaM,
  idealisedProfile,
  type LayerHeights,
  profileDb,
  USUAL_PROFILE,
  type VerticalProfile,
} from "./echo/profile/vertical-profile.ts";
export { DropNumberLearner, type LearnedDropNumber } from "./echo/rain-rate/drop-number.ts";
export {
  DropSizeLearner,
  type DropSizeRatio,
  dropSizeRatio,
  joinDropSizes,
  type LearnedDropSize,
} from "./echo/rain-rate/drop-size.ts";
export {
  type AttenuationRateLaw,
  type BandLaws,
  bandLaws,
  type KdpLaw,
  type KdpZdrLaw,
  kdpLaw,
  rateOfAttenuation,
  rateOfKdp,
  rateOfKdpZdr,
  rateOfZZdr,
  type ZZdrLaw,
} from "./echo/rain-rate/estimators.ts";
export {
  type GateRateAccount,
  type GateRatesOfSweep,
  gateRateAccount,
  gateRates,
  gateRatesUnder,
  RATE_METHODS,
  type RateCounts,
  type RateMethod,
} from "./echo/rain-rate/gate-rates.ts";
export { hailShare, rainLimitDbz } from "./echo/rain-rate/hail.ts";
export {
  type GateRateSettings,
  POLARIMETRIC_RATE_DEFAULTS,
  type PolarimetricRateSettings,
  rateTables,
} from "./echo/rain-rate/rate-tables.ts";
export { type RateTables, type ReadyRelation, rateOfZ } from "./echo/rain-rate/ready-relation.ts";
export { type LearnedZdrOffset, usualZdrDb, ZdrOffsetLearner } from "./echo/rain-rate/zdr-offset.ts";
export {
  backgroundDbz,
  CONVECTIVE_RADIUS_RULES,
  type ConvectiveRadiusRule,
  convectiveExcessDb,
  convectiveRadiusM,
  RAIN_TYPE,
  RAIN_TYPE_DEFAULTS,
  type RainTypeSettings,
  rainTypes,
  type TypeGrid,
} from "./echo/rain-type/steiner.ts";
export { screenSweep } from "./echo/screening/screen-sweep.ts";
export {
  DEFAULT_SCREENING,
  firstScreenOf,
  type ScreeningReport,
  type ScreeningSettings,
} from "./echo/screening/settings.ts";
export type { FixedEcho, LearnedStaticEcho, LearnedSweep } from "./echo/screening/static-echo.ts";
export { StaticEchoLearner } from "./echo/screening/static-echo-learner.ts";
export type { SweepGeometry } from "./echo/screening/sweep-geometry.ts";
export { spinChangePercent, textureDb2 } from "./echo/screening/texture.ts";
export { errorFunction, scaledErrorComplement } from "./error-function.ts";
export {
  ATLAS_SRIVASTAVA_SEKHON_1973,
  ATLAS_ULBRICH_1977,
  type FallLaw,
  fallSpeedFactor,
  fallSpeedMPerS,
  measuredFallSpeedMPerS,
} from "./fall-speed.ts";
export { gamma, logGamma, lowerGammaShare } from "./gamma-function.ts";
export { type GasAttenuation, gasAttenuationOneWay } from "./gas-attenuation.ts";
export { gasLossTwoWayDb } from "./gas-loss.ts";
export { type GroundHit, groundHit, type TerrainProfile } from "./ground-hit.ts";
export { layerShare } from "./layer-overlap.ts";
export {
  LowestEcho,
  type MeasuredSensitivity,
  measuredDetectableDbz,
  RANGE_BAND_M,
  scansDisprove,
} from "./lowest-echo.ts";
export { type DropScattering, mieEfficiency, type ScatteringEfficiency, scatteringOfDrop } from "./mie.ts";
export * from "./model/catchment.ts";
export * from "./model/errors.ts";
export * from "./model/frequency.ts";
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
export { type GasLine, OXYGEN_LINES, VAPOUR_LINES } from "./p676-lines.ts";
export { pathLossTwoWayDb } from "./path-loss.ts";
export {
  effectiveVolumeM3,
  geometricVolumeM3,
  nyquistVelocityMPerS,
  rangeResolutionM,
  unambiguousRangeM,
} from "./pulse.ts";
export {
  checkRadarSystem,
  type RadarSystem,
  radarConstantDb,
  receivedPowerDbm,
  reflectivityOfPowerDbz,
} from "./radar-equation.ts";
export {
  type AttenuationLaw,
  attenuationOfZLaw,
  attenuationOfZOneWayDbPerKm,
  HORIZONTAL,
  rainAttenuationLaw,
  rainAttenuationOneWayDbPerKm,
  rainLossTwoWayDb,
  shareOfZLost,
  VERTICAL,
  type WavePath,
} from "./rain-attenuation.ts";
export {
  gateRate,
  momentRates,
  type RateSettings,
  type Rates,
  rateConverter,
  rateTable,
} from "./rate-table.ts";
export { LARGEST_RAIN_DROP_MM, rayleighCaution, rayleighLimitMm } from "./rayleigh.ts";
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
  detectableAt1KmDbz,
  detectableDbz,
  lightestVisibleRainMmPerHour,
  NOISE_REFERENCE_K,
  noisePowerDbm,
  smallestVisibleDropMm,
} from "./sensitivity.ts";
export { type ClassSettings, DB_PER_NEPER, type DropClass, dropClasses } from "./spectrum-scattering.ts";
export { arePartsOfOne, dopplerCuts, type JoinedSweep, joinParts } from "./sweep-parts.ts";
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
