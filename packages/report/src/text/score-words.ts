import type { Score, ScoreInterval } from "@rainreckon/core";
import type { ReportScore } from "../input.ts";
import { counted, errorText, mmText, percentText, ratioText, signedErrorText } from "./numbers.ts";

/** A score as a sentence, and its number with its unit. */
export interface ScoreWords {
  readonly sentence: string;
  readonly figure: string;
  /** A bound of an interval, in the figure's own unit and digits. */
  readonly bound: (value: number) => string;
}

interface Wording {
  /** What the score is about, for when it has no value. */
  readonly subject: string;
  /** The sentence for a value; `rain` is "rain" with its threshold. */
  readonly sentence: (value: number, rain: string) => string;
  readonly figure: (value: number) => string;
  /** A bound of an interval, where it is not written as the bare ratio. */
  readonly bound?: (value: number) => string;
}

/** Within half a per cent a ratio reads as equal. */
const EQUAL = 0.005;

function lessOrMore(ratio: number): string {
  if (Math.abs(ratio - 1) < EQUAL) return "Radar saw as much rain as the gauges";
  return `Radar saw ${percentText(Math.abs(ratio - 1))} ${ratio < 1 ? "less" : "more"} rain than the gauges`;
}

const mm = (value: number) => `${errorText(value)} mm`;
const signedMm = (value: number) => `${signedErrorText(value)} mm`;
const radarPerGauge = (value: number) => `${ratioText(value)} radar/gauge`;
const decibels = (value: number) => `${errorText(value)} dB`;
const perCent = (value: number) => `${errorText(value)} %`;

/** A score whose sentence does not depend on its value. */
function plain(
  sentence: string,
  figure: (value: number) => string,
  bound?: (value: number) => string,
): Wording {
  return { subject: sentence, sentence: () => sentence, figure, ...(bound === undefined ? {} : { bound }) };
}

/** A score of yes and no, whose sentence names its threshold. */
function yesOrNo(
  sentence: (rain: string) => string,
  figure: (value: number) => string,
  bound?: (value: number) => string,
): Wording {
  return {
    subject: sentence("rain"),
    sentence: (_, rain) => sentence(rain),
    figure,
    ...(bound === undefined ? {} : { bound }),
  };
}

/** Words by the name of the score. A score without words here is printed with its title or definition. */
const WORDINGS: Readonly<Record<string, Wording>> = {
  biasRatio: {
    subject: "Rain that radar saw, against the gauges",
    sentence: lessOrMore,
    figure: radarPerGauge,
  },
  biasRatioDb: {
    subject: "The ratio of sums in decibels",
    sentence: (value) =>
      value === 0
        ? "The same ratio in decibels"
        : `The same ratio in decibels: radar too ${value < 0 ? "dry" : "wet"}`,
    figure: (value) => `${decibels(value)}, radar/gauge`,
    bound: decibels,
  },
  relativeBiasPercent: plain(
    "Radar minus gauge as a share of the gauge depth (relative bias)",
    perCent,
    perCent,
  ),
  meanErrorMm: {
    subject: "Mean of radar minus gauge",
    sentence: (value) =>
      value === 0
        ? "On average the radar depth of a pair equals its gauge"
        : `On average the radar depth of a pair is ${mm(Math.abs(value))} ${value < 0 ? "below" : "above"} its gauge`,
    figure: (value) => `${signedMm(value)}, radar minus gauge`,
    bound: signedMm,
  },
  meanAbsoluteErrorMm: plain("The usual miss of a pair, whichever way (mean absolute error)", mm, mm),
  relativeMeanAbsoluteError: plain(
    "The usual miss as a share of the mean gauge depth",
    percentText,
    percentText,
  ),
  rootMeanSquareErrorMm: plain("The miss with large ones weighing more (root mean square error)", mm, mm),
  errorSpreadMm: plain("Scatter of the miss about its mean, without the bias (standard deviation)", mm, mm),
  fractionalStandardError: plain(
    "Root mean square error as a share of the mean gauge depth",
    percentText,
    percentText,
  ),
  pearsonCorrelation: plain(
    "How closely radar follows the gauges along a straight line; 1 is perfect (Pearson correlation)",
    ratioText,
  ),
  spearmanCorrelation: plain(
    "How well radar ranks the wet and the dry; 1 is perfect (Spearman rank correlation)",
    ratioText,
  ),
  nashSutcliffe: {
    subject: "Radar against the gauges' plain mean (Nash–Sutcliffe efficiency)",
    sentence: (value) =>
      `Radar tells ${value > 0 ? "more" : "no more"} than the gauges' plain mean would; 1 is perfect (Nash–Sutcliffe efficiency)`,
    figure: ratioText,
  },
  klingGupta2012: plain(
    "Correlation, total and spread taken together; 1 is perfect (Kling–Gupta efficiency, 2012 form)",
    ratioText,
  ),
  klingGuptaBeta: plain("Its part for the total: ratio of means", radarPerGauge),
  klingGuptaGamma: plain("Its part for the spread: ratio of coefficients of variation", radarPerGauge),
  meanLogRatioDb: plain(
    "Mean log ratio, every pair weighing the same",
    (value) => `${decibels(value)}, radar/gauge`,
    decibels,
  ),
  medianLogRatioDb: plain(
    "Median log ratio: half of the pairs lie above it",
    (value) => `${decibels(value)}, radar/gauge`,
    decibels,
  ),
  logRatioSpreadDb: plain("Scatter of the log ratio, without the bias", decibels, decibels),
  rootMeanSquareFactor: plain(
    "The usual factor between radar and gauge, whichever way; 1 is perfect (root mean square factor)",
    ratioText,
  ),
  shareWithinFactor2: plain(
    "Pairs in which radar and gauge lie within a factor of two",
    percentText,
    percentText,
  ),
  baseRate: yesOrNo((rain) => `Gauge intervals with ${rain}, of all`, percentText, percentText),
  proportionCorrect: yesOrNo(
    (rain) => `Intervals in which radar and gauge agree whether there was ${rain}`,
    percentText,
    percentText,
  ),
  probabilityOfDetection: yesOrNo(
    (rain) => `Of the gauge intervals with ${rain}, radar saw it too in`,
    percentText,
    percentText,
  ),
  falseAlarmRatio: yesOrNo(
    (rain) => `Of the radar intervals with ${rain}, the gauge stayed below it in`,
    percentText,
    percentText,
  ),
  probabilityOfFalseDetection: yesOrNo(
    (rain) => `Of the gauge intervals without ${rain}, radar reported it all the same in`,
    percentText,
    percentText,
  ),
  criticalSuccessIndex: yesOrNo(
    (rain) => `Where gauge or radar saw ${rain}, both did in`,
    percentText,
    percentText,
  ),
  frequencyBias: yesOrNo(
    (rain) => `How often radar saw ${rain}, for each time that a gauge did`,
    radarPerGauge,
  ),
  equitableThreatScore: yesOrNo(
    (rain) => `Agreement on ${rain} beyond chance; 1 is perfect (equitable threat score)`,
    ratioText,
  ),
  heidkeSkillScore: yesOrNo(
    (rain) => `Right calls on ${rain} beyond chance; 1 is perfect (Heidke skill score)`,
    ratioText,
  ),
  peirceSkillScore: yesOrNo(
    (rain) => `Detection of ${rain} less false detection; 1 is perfect (Peirce skill score)`,
    ratioText,
  ),
  oddsRatio: yesOrNo(
    (rain) => `Odds that radar is right on ${rain} over the odds that it is wrong; 1 is chance (odds ratio)`,
    ratioText,
  ),
  oddsRatioSkillScore: yesOrNo(
    (rain) => `The odds ratio on ${rain} brought to a scale that ends at 1, which is perfect (Yule's Q)`,
    ratioText,
  ),
  extremalDependencyIndex: yesOrNo(
    (rain) => `Detection of ${rain} beyond chance, however rare; 1 is perfect (extremal dependency index)`,
    ratioText,
  ),
  symmetricExtremalDependencyIndex: yesOrNo(
    (rain) =>
      `The same for ${rain} and for its absence alike; 1 is perfect (symmetric extremal dependency index)`,
    ratioText,
  ),
};

/** Names of the scores that the report has words for, in the order in which they read best. */
export const WORDED_SCORES: readonly string[] = Object.keys(WORDINGS);

function rainOf(thresholdMm: number | undefined): string {
  return thresholdMm === undefined ? "rain" : `rain of ${mmText(thresholdMm)} mm or more`;
}

function withThreshold(words: string, thresholdMm: number | undefined): string {
  return thresholdMm === undefined ? words : `${words} (${rainOf(thresholdMm)})`;
}

/** The words for a score whose value is finite. */
export function scoreWords({ score, title, thresholdMm }: ReportScore): ScoreWords {
  const wording = WORDINGS[score.name];
  if (wording === undefined) {
    const unit = score.unit === "" || score.unit === "1" ? "" : ` ${score.unit}`;
    return {
      sentence: withThreshold(title ?? score.definition, thresholdMm),
      figure: `${ratioText(score.value)}${unit}`,
      bound: ratioText,
    };
  }
  return {
    sentence: wording.sentence(score.value, rainOf(thresholdMm)),
    figure: wording.figure(score.value),
    bound: wording.bound ?? ratioText,
  };
}

/** The sentence of a score that has no value: what it would have told. */
export function scoreSubject({ score, title, thresholdMm }: ReportScore): string {
  return withThreshold(WORDINGS[score.name]?.subject ?? title ?? score.definition, thresholdMm);
}

const RESAMPLED: Readonly<Record<"timeBlocks" | "gauges", string>> = {
  timeBlocks: "over blocks of time",
  gauges: "over gauges",
};

const KINDS = ["timeBlocks", "gauges"] as const;

function isKnown({ low, high }: ScoreInterval): boolean {
  return Number.isFinite(low) && Number.isFinite(high);
}

/** "90 % interval 0.80 to 0.97 over gauges", for each kind of resampling that gave one. */
export function intervalWords({ intervals }: Score, bound: (value: number) => string): string[] {
  if (intervals === undefined) return [];
  return KINDS.filter((kind) => isKnown(intervals[kind])).map((kind) => {
    const { low, high, level } = intervals[kind];
    return `${percentText(level)} interval ${bound(low)} to ${bound(high)} ${RESAMPLED[kind]}`;
  });
}

/** Why intervals are missing, each reason once with the number of scores that it befell. */
export function missingIntervalWords(scores: readonly Score[]): string[] {
  const tally = new Map<string, number>();
  for (const { value, intervals } of scores) {
    // A score without a value says why itself.
    if (intervals === undefined || !Number.isFinite(value)) continue;
    for (const kind of KINDS.filter((each) => !isKnown(intervals[each]))) {
      const words = `${RESAMPLED[kind]}: ${intervals[kind].reason ?? "it cannot be worked out"}`;
      tally.set(words, (tally.get(words) ?? 0) + 1);
    }
  }
  return [...tally].map(([words, count]) => `${counted(count, "score")} without an interval ${words}.`);
}
