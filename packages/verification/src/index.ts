export { type BootstrapSettings, MIN_BOOTSTRAP_UNITS } from "./bootstrap.ts";
export { closestOf3x3, type GridShape } from "./cell.ts";
export { type DepthPairs, keptBy, pick } from "./conditioning.ts";
export {
  type ContingencyCounts,
  contingencyCounts,
  contingencyScores,
  contingencyStandardErrors,
  contingencyWilson,
  wilsonInterval,
} from "./contingency.ts";
export { additiveScores, ratioScores } from "./continuous.ts";
export {
  type AdditiveScoreName,
  type ContingencyScoreName,
  type PairRule,
  type RatioScoreName,
  SCORE_DEFINITIONS,
  type ScoreDefinition,
  type ScoreName,
} from "./definitions.ts";
export type { ScoreValue } from "./evaluator.ts";
export { type DoubtedReadings, type GaugeSteps, gaugeDepth, gaugeSteps } from "./gauge-steps.ts";
export { type GaugeRow, gaugeRows } from "./gauge-table.ts";
export { DEPTH_SLACK_MM, decibels, quotient } from "./numbers.ts";
export {
  type GaugePairs,
  leaveOut,
  makePairs,
  type PairInput,
  type RadarSteps,
} from "./pairs.ts";
export { type RatioStandardError, ratioStandardError } from "./ratio-error.ts";
export {
  type ContingencyScore,
  type GaugeGroup,
  type IntervalGroup,
  type RangeGroup,
  type ScoreGroup,
  type ScoreOptions,
  type ScoreTable,
  scorePairs,
  type ThresholdScores,
} from "./score-table.ts";
export {
  type MethodChoiceTable,
  type ScoresDocument,
  type ScoresDocumentInput,
  scoresDocument,
  scoresSchema,
} from "./scores-document.ts";
export {
  type GaugeEvidence,
  type GaugeOverride,
  type GaugeVerdict,
  judgeGauges,
  leftOutReasons,
} from "./suspect.ts";
