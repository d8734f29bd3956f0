/** Which pairs a score is worked out on, at threshold t. */
export type PairRule =
  /** Radar or gauge reached t: scores of depths. */
  | "either"
  /** Radar and gauge both reached t: scores of ratios. */
  | "both"
  /** Every used pair, wet or dry: scores of yes and no. */
  | "all";

/** What a score means, for people and for `scores.json`. */
export interface ScoreDefinition {
  /** The trade's words, with radar/gauge said where a quotient could be read either way. */
  readonly title: string;
  /** "1" for pure numbers. */
  readonly unit: string;
  /** Value of a perfect radar. */
  readonly best: number;
  readonly rule: PairRule;
  /** Formula: R radar, G gauge, sums and means over the kept pairs. */
  readonly definition: string;
  readonly source?: string;
}

export const ADDITIVE_SCORES = {
  biasRatio: {
    title: "ratio of sums, radar/gauge",
    unit: "1",
    best: 1,
    rule: "either",
    definition: "sum R / sum G",
  },
  biasRatioDb: {
    title: "ratio of sums, radar/gauge, in decibels",
    unit: "dB",
    best: 0,
    rule: "either",
    definition: "10 log10(sum R / sum G); positive: radar too wet",
  },
  relativeBiasPercent: {
    title: "relative bias, radar minus gauge",
    unit: "%",
    best: 0,
    rule: "either",
    definition: "100 sum(R - G) / sum G",
  },
  meanErrorMm: {
    title: "mean error, radar minus gauge",
    unit: "mm",
    best: 0,
    rule: "either",
    definition: "mean(R - G)",
  },
  meanAbsoluteErrorMm: {
    title: "mean absolute error",
    unit: "mm",
    best: 0,
    rule: "either",
    definition: "mean |R - G|",
  },
  relativeMeanAbsoluteError: {
    title: "mean absolute error over mean gauge",
    unit: "1",
    best: 0,
    rule: "either",
    definition: "sum |R - G| / sum G",
  },
  rootMeanSquareErrorMm: {
    title: "root mean square error",
    unit: "mm",
    best: 0,
    rule: "either",
    definition: "sqrt(mean (R - G)^2)",
  },
  errorSpreadMm: {
    title: "spread of the error about its mean",
    unit: "mm",
    best: 0,
    rule: "either",
    definition: "sqrt(mean (R - G)^2 - (mean(R - G))^2), divisor n",
  },
  fractionalStandardError: {
    title: "fractional standard error",
    unit: "1",
    best: 0,
    rule: "either",
    definition: "sqrt(mean (R - G)^2) / mean G",
  },
  pearsonCorrelation: {
    title: "correlation",
    unit: "1",
    best: 1,
    rule: "either",
    definition: "Pearson's product-moment correlation of R and G",
  },
  spearmanCorrelation: {
    title: "rank correlation",
    unit: "1",
    best: 1,
    rule: "either",
    definition: "Pearson's correlation of the average ranks of R and G (Spearman)",
  },
  nashSutcliffe: {
    title: "Nash-Sutcliffe efficiency",
    unit: "1",
    best: 1,
    rule: "either",
    definition: "1 - sum (R - G)^2 / sum (G - mean G)^2",
    source: "Nash and Sutcliffe (1970), Journal of Hydrology 10, 282-290",
  },
  klingGupta2012: {
    title: "Kling-Gupta efficiency KGE' (2012)",
    unit: "1",
    best: 1,
    rule: "either",
    definition:
      "1 - sqrt((r - 1)^2 + (beta - 1)^2 + (gamma - 1)^2), r Pearson's correlation; 0 does not mean as good as the gauge mean",
    source: "Kling, Fuchs and Paulin (2012), Journal of Hydrology 424-425, 264-277",
  },
  klingGuptaBeta: {
    title: "KGE' part beta: ratio of means, radar/gauge",
    unit: "1",
    best: 1,
    rule: "either",
    definition: "mean R / mean G",
    source: "Kling, Fuchs and Paulin (2012), Journal of Hydrology 424-425, 264-277",
  },
  klingGuptaGamma: {
    title: "KGE' part gamma: ratio of coefficients of variation, radar/gauge",
    unit: "1",
    best: 1,
    rule: "either",
    definition: "(sd R / mean R) / (sd G / mean G)",
    source: "Kling, Fuchs and Paulin (2012), Journal of Hydrology 424-425, 264-277",
  },
} as const satisfies Record<string, ScoreDefinition>;

export const RATIO_SCORES = {
  meanLogRatioDb: {
    title: "mean log ratio, radar/gauge",
    unit: "dB",
    best: 0,
    rule: "both",
    definition: "mean of 10 log10(R / G): every pair weighs the same",
  },
  medianLogRatioDb: {
    title: "median log ratio, radar/gauge",
    unit: "dB",
    best: 0,
    rule: "both",
    definition: "median of 10 log10(R / G)",
  },
  logRatioSpreadDb: {
    title: "spread of the log ratio",
    unit: "dB",
    best: 0,
    rule: "both",
    definition: "standard deviation of 10 log10(R / G), divisor n - 1: scatter alone, without the bias",
  },
  rootMeanSquareFactor: {
    title: "root mean square factor",
    unit: "1",
    best: 1,
    rule: "both",
    definition: "exp(sqrt(mean (ln(R / G))^2)): bias and scatter together, as a factor of at least 1",
    source: "Golding (1998), Meteorological Applications 5, 1-16 (from memory)",
  },
  shareWithinFactor2: {
    title: "share within a factor of 2",
    unit: "1",
    best: 1,
    rule: "both",
    definition: "share of pairs with 1/2 <= R / G <= 2",
  },
} as const satisfies Record<string, ScoreDefinition>;

/** Counts: a hits, b false alarms, c misses, d correct negatives, n their sum; an event reaches the threshold. */
export const CONTINGENCY_SCORES = {
  baseRate: {
    title: "share of events at the gauges",
    unit: "1",
    best: Number.NaN,
    rule: "all",
    definition: "(a + c) / n",
  },
  proportionCorrect: {
    title: "proportion correct",
    unit: "1",
    best: 1,
    rule: "all",
    definition: "(a + d) / n",
  },
  frequencyBias: {
    title: "frequency bias, radar/gauge",
    unit: "1",
    best: 1,
    rule: "all",
    definition: "(a + b) / (a + c)",
  },
  probabilityOfDetection: {
    title: "probability of detection (POD)",
    unit: "1",
    best: 1,
    rule: "all",
    definition: "a / (a + c)",
  },
  falseAlarmRatio: {
    title: "false alarm ratio (FAR): of the radar's events",
    unit: "1",
    best: 0,
    rule: "all",
    definition: "b / (a + b)",
  },
  probabilityOfFalseDetection: {
    title: "probability of false detection (POFD): of the gauges' non-events",
    unit: "1",
    best: 0,
    rule: "all",
    definition: "b / (b + d)",
  },
  criticalSuccessIndex: {
    title: "critical success index (CSI)",
    unit: "1",
    best: 1,
    rule: "all",
    definition: "a / (a + b + c)",
  },
  equitableThreatScore: {
    title: "equitable threat score (ETS, Gilbert skill score)",
    unit: "1",
    best: 1,
    rule: "all",
    definition: "(a - h) / (a + b + c - h), h = (a + b)(a + c) / n the hits of chance",
  },
  heidkeSkillScore: {
    title: "Heidke skill score (HSS)",
    unit: "1",
    best: 1,
    rule: "all",
    definition: "2 (a d - b c) / ((a + c)(c + d) + (a + b)(b + d))",
  },
  peirceSkillScore: {
    title: "Peirce skill score (PSS)",
    unit: "1",
    best: 1,
    rule: "all",
    definition: "a / (a + c) - b / (b + d)",
  },
  oddsRatio: {
    title: "odds ratio",
    unit: "1",
    best: Number.POSITIVE_INFINITY,
    rule: "all",
    definition: "a d / (b c)",
    source: "Stephenson (2000), Weather and Forecasting 15, 221-232",
  },
  oddsRatioSkillScore: {
    title: "odds ratio skill score (Yule's Q)",
    unit: "1",
    best: 1,
    rule: "all",
    definition: "(a d - b c) / (a d + b c)",
    source: "Stephenson (2000), Weather and Forecasting 15, 221-232",
  },
  extremalDependencyIndex: {
    title: "extremal dependency index (EDI)",
    unit: "1",
    best: 1,
    rule: "all",
    definition: "(ln F - ln H) / (ln F + ln H), H = a / (a + c), F = b / (b + d)",
    source: "Ferro and Stephenson (2011), Weather and Forecasting 26, 699-713",
  },
  symmetricExtremalDependencyIndex: {
    title: "symmetric extremal dependency index (SEDI)",
    unit: "1",
    best: 1,
    rule: "all",
    definition:
      "(ln F - ln H - ln(1 - F) + ln(1 - H)) / (ln F + ln H + ln(1 - F) + ln(1 - H)), H = a / (a + c), F = b / (b + d)",
    source: "Ferro and Stephenson (2011), Weather and Forecasting 26, 699-713",
  },
} as const satisfies Record<string, ScoreDefinition>;

export type AdditiveScoreName = keyof typeof ADDITIVE_SCORES;
export type RatioScoreName = keyof typeof RATIO_SCORES;
export type ContingencyScoreName = keyof typeof CONTINGENCY_SCORES;
export type ScoreName = AdditiveScoreName | RatioScoreName | ContingencyScoreName;

/** Every score by its name, in the order of tables. */
export const SCORE_DEFINITIONS: Readonly<Record<ScoreName, ScoreDefinition>> = {
  ...ADDITIVE_SCORES,
  ...RATIO_SCORES,
  ...CONTINGENCY_SCORES,
};

/** Names of an object's keys, with their type. */
export function namesOf<T extends object>(table: T): (keyof T)[] {
  return Object.keys(table) as (keyof T)[];
}
