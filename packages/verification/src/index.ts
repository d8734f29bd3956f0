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
export type {
  FieldSamples,
  GaugeEvidence,
  GaugeOverride,
  JudgeContext,
  RadarSight,
} from "./evidence.ts";
export { type DoubtedReadings, type GaugeSteps, gaugeDepth, gaugeSteps } from "./gauge-steps.ts";
export { type GaugeRow, gaugeRows } from "./gauge-table.ts";
export { judgeGauges, leftOutReasons } from "./judging/judge.ts";
export { judgeRadars, type RadarContext } from "./judging/judge-radars.ts";
export { DEPTH_SLACK_MM, decibels, quotient } from "./numbers.ts";
export {
  type GaugePairs,
  leaveOut,
  makePairs,
  type PairInput,
  type RadarSteps,
} from "./pairs.ts";
export { uniformStream } from "./random.ts";
export { type RatioStandardError, ratioStandardError } from "./ratio-error.ts";
export type { Doubt } from "./relation-fit/fit-doubts.ts";
export {
  type FitSettings,
  type FittedRelations,
  fitRelations,
  MIN_FIT_PAIRS,
  type PairCover,
  RELATION_FITS,
  type RelationFit,
  type RelationFitName,
} from "./relation-fit/fit-relations.ts";
export { logFits } from "./relation-fit/log-fits.ts";
export { matchedRate, matchProbabilities } from "./relation-fit/probability-matching.ts";
export {
  RANK_RULE,
  type RankCandidate,
  type RankedRelation,
  type Ranking,
  type RankMode,
  type RelationRanks,
  rankRelations,
} from "./relation-fit/rank-relations.ts";
export type { PairUnits } from "./relation-fit/resample-pairs.ts";
export { biasFreeFit, biasFreeLaw, type RelationError, relationError } from "./relation-fit/sum-fits.ts";
export {
  choosePairs,
  type PairChoice,
  type PowerLaw,
  pickPairs,
  type ZrPairs,
} from "./relation-fit/zr-pairs.ts";
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
  type BiasGroup,
  type Blame,
  CAUSES,
  type CauseName,
  CHECKS,
  type CheckName,
  type Finding,
  type GaugeVerdict,
  type LikelyCause,
  likelyCause,
  type NeighbourBias,
  type RadarVerdict,
  type Verdict,
} from "./verdict.ts";
