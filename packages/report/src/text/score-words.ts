import type { Score, ScoreInterval } from "@rainreckon/core";
import type { ReportScore } from "../input.ts";
import { mmText, percentText, ratioText, signedMmText } from "./numbers.ts";

/** A score as a sentence, and its number with its unit. */
export interface ScoreWords {
  readonly sentence: string;
  readonly figure: string;
  /** A bound of an interval, in the figure's own unit and digits. */
  readonly bound: (value: number) => string;
}

type Writer = (
  value: number,
  threshold: string,
) => Omit<ScoreWords, "bound"> & { bound?: (value: number) => string };

/** Within half a per cent a ratio reads as equal. */
const EQUAL = 0.005;

function lessOrMore(ratio: number): string {
  if (Math.abs(ratio - 1) < EQUAL) return "Radar saw as much rain as the gauges";
  const share = percentText(Math.abs(ratio - 1));
  return `Radar saw ${share} ${ratio < 1 ? "less" : "more"} rain than the gauges`;
}

const mmBound = (value: number) => `${mmText(value)} mm`;

/** Words by the name of the score. A score without words here is printed with its definition. */
const WRITERS: Readonly<Record<string, Writer>> = {
  biasRatio: (value) => ({ sentence: lessOrMore(value), figure: `${ratioText(value)} radar/gauge` }),
  biasDb: (value) => ({
    sentence: `The same in decibels: ${value < 0 ? "radar too dry" : "radar too wet"}`,
    figure: `${ratioText(value)} dB, radar/gauge`,
  }),
  meanErrorMm: (value) => ({
    sentence: `On average a pair's radar depth is ${mmText(Math.abs(value))} mm ${value < 0 ? "below" : "above"} its gauge`,
    figure: `${signedMmText(value)} mm, radar minus gauge`,
    bound: (bound) => `${signedMmText(bound)} mm`,
  }),
  meanAbsoluteErrorMm: (value) => ({
    sentence: "The usual miss of a pair, whichever way (mean absolute error)",
    figure: mmBound(value),
    bound: mmBound,
  }),
  rootMeanSquareErrorMm: (value) => ({
    sentence: "The miss with large ones weighing more (root mean square error)",
    figure: mmBound(value),
    bound: mmBound,
  }),
  fractionalStandardError: (value) => ({
    sentence: "Root mean square error as a share of the mean gauge depth",
    figure: percentText(value),
    bound: percentText,
  }),
  pearsonCorrelation: (value) => ({
    sentence:
      "How closely radar follows the gauges along a straight line; 1 is perfectly (Pearson correlation)",
    figure: ratioText(value),
  }),
  spearmanCorrelation: (value) => ({
    sentence: "How well radar ranks the wet and the dry; 1 is perfectly (Spearman rank correlation)",
    figure: ratioText(value),
  }),
  nashSutcliffeEfficiency: (value) => ({
    sentence:
      value > 0
        ? "Radar tells more than the gauges' plain mean would; 1 is perfect (Nash–Sutcliffe efficiency)"
        : "Radar tells no more than the gauges' plain mean would; 1 is perfect (Nash–Sutcliffe efficiency)",
    figure: ratioText(value),
  }),
  klingGuptaEfficiency: (value) => ({
    sentence:
      "Correlation, total and spread taken together; 1 is perfect (Kling–Gupta efficiency, 2012 form)",
    figure: ratioText(value),
  }),
  probabilityOfDetection: (value, threshold) => ({
    sentence: `Of the gauge intervals with rain${threshold}, radar also saw rain in`,
    figure: percentText(value),
    bound: percentText,
  }),
  falseAlarmRatio: (value, threshold) => ({
    sentence: `Of the radar intervals with rain${threshold}, the gauge stayed below it in`,
    figure: percentText(value),
    bound: percentText,
  }),
  criticalSuccessIndex: (value, threshold) => ({
    sentence: `Where gauge or radar saw rain${threshold}, both did in`,
    figure: percentText(value),
    bound: percentText,
  }),
  frequencyBias: (value, threshold) => ({
    sentence: `How often radar saw rain${threshold}, for each time that a gauge did`,
    figure: `${ratioText(value)} radar/gauge`,
  }),
};

/** The words for a score whose value is finite. */
export function scoreWords({ score, thresholdMm }: ReportScore): ScoreWords {
  const threshold = thresholdMm === undefined ? "" : ` of ${mmText(thresholdMm)} mm or more`;
  const writer = WRITERS[score.name];
  const words = writer?.(score.value, threshold) ?? {
    sentence: `${score.definition}${threshold === "" ? "" : `, rain${threshold}`}`,
    figure: `${ratioText(score.value)}${score.unit === "" || score.unit === "1" ? "" : ` ${score.unit}`}`,
  };
  return { bound: ratioText, ...words };
}

/** The sentence of a score that has no value: what it would have said. */
export function scoreSubject({ score, thresholdMm }: ReportScore): string {
  const threshold = thresholdMm === undefined ? "" : ` (rain of ${mmText(thresholdMm)} mm or more)`;
  return `${score.definition}${threshold}`;
}

const RESAMPLED: Readonly<Record<"timeBlocks" | "gauges", string>> = {
  timeBlocks: "over blocks of time",
  gauges: "over gauges",
};

/** "90 % interval 0.80 to 0.97 over blocks of time", for each kind of resampling; or why there is none. */
export function intervalWords(score: Score, bound: (value: number) => string): string[] {
  const { intervals } = score;
  if (intervals === undefined) return [];
  return (["timeBlocks", "gauges"] as const).map((kind) => {
    const interval: ScoreInterval = intervals[kind];
    if (!Number.isFinite(interval.low) || !Number.isFinite(interval.high)) {
      return `no interval ${RESAMPLED[kind]}: ${interval.reason ?? "it cannot be worked out"}`;
    }
    return `${percentText(interval.level)} interval ${bound(interval.low)} to ${bound(interval.high)} ${RESAMPLED[kind]}`;
  });
}
