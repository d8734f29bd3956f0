// Published and independently computed values: verification topics a (continuous scores), b
// (contingency, intervals) and c (fractions skill score), held against the functions that the score
// table calls. Sources stand at each value.
import {
  type CheckValue,
  checkValue,
  inputNumber,
  inputNumbers,
  runReferenceSuite,
} from "@rainreckon/test-data/published";
import { addCircularBlock } from "./bootstrap.ts";
import { type DepthPairs, keptBy, pick } from "./conditioning.ts";
import {
  contingencyCounts,
  contingencyScores,
  contingencyStandardErrors,
  wilsonInterval,
} from "./contingency.ts";
import { additiveEvaluator, additiveScores, ratioScores } from "./continuous.ts";
import { fromDecibels } from "./numbers.ts";
import { percentile } from "./percentile.ts";
import { ratioStandardError } from "./ratio-error.ts";

const pairs24 = (() => {
  const table = checkValue("a-pairs24-table").expected as {
    gauge_mm: number[];
    radar_mm: number[];
    range_km: number[];
  };
  return {
    gaugeMm: Float64Array.from(table.gauge_mm),
    radarMm: Float64Array.from(table.radar_mm),
    rangeKm: table.range_km,
  };
})();

/** The scores under the names that the check values use. */
function continuousBook(pairs: DepthPairs) {
  const scores = additiveScores(pairs);
  const value = (name: keyof typeof scores) => scores[name].value;
  const n = pairs.gaugeMm.length;
  // The sums are not scores, but follow from three of them.
  return {
    n,
    sumG: (value("meanAbsoluteErrorMm") / value("relativeMeanAbsoluteError")) * n,
    sumR: (value("meanAbsoluteErrorMm") / value("relativeMeanAbsoluteError")) * n * value("biasRatio"),
    ratio: value("biasRatio"),
    ratio_R_over_G: value("biasRatio"),
    sum_ratio: value("biasRatio"),
    ratio_G_over_R: 1 / value("biasRatio"),
    ratio_dB: value("biasRatioDb"),
    mean_error: value("meanErrorMm"),
    relative_bias_percent: value("relativeBiasPercent"),
    mae: value("meanAbsoluteErrorMm"),
    rmse: value("rootMeanSquareErrorMm"),
    error_sd_population: value("errorSpreadMm"),
    error_sd_sample: value("errorSpreadMm") * Math.sqrt(n / (n - 1)),
    relative_mae: value("relativeMeanAbsoluteError"),
    fractional_standard_error: value("fractionalStandardError"),
    pearson_r: value("pearsonCorrelation"),
    spearman_rho: value("spearmanCorrelation"),
    nse: value("nashSutcliffe"),
    kge2012: value("klingGupta2012"),
    kge_beta: value("klingGuptaBeta"),
    kge_gamma: value("klingGuptaGamma"),
    // By definition alpha = sd R / sd G = gamma beta; the form of 2009 is made of r, alpha and beta.
    kge_alpha: value("klingGuptaGamma") * value("klingGuptaBeta"),
    kge2009:
      1 -
      Math.hypot(
        value("pearsonCorrelation") - 1,
        value("klingGuptaGamma") * value("klingGuptaBeta") - 1,
        value("klingGuptaBeta") - 1,
      ),
  };
}

function ratioBook(pairs: DepthPairs) {
  const scores = ratioScores(pairs);
  const n = pairs.gaugeMm.length;
  const spread = scores.logRatioSpreadDb.value;
  return {
    n,
    mean_log10_ratio_dB: scores.meanLogRatioDb.value,
    median_log10_ratio_dB: scores.medianLogRatioDb.value,
    sd_log10_ratio_dB_sample: spread,
    sd_log10_ratio_dB_population: spread * Math.sqrt((n - 1) / n),
    geometric_mean_ratio: fromDecibels(scores.meanLogRatioDb.value),
    rmsf: scores.rootMeanSquareFactor.value,
    share_within_factor_2: scores.shareWithinFactor2.value,
  };
}

function depths(entry: CheckValue): DepthPairs {
  return {
    gaugeMm: Float64Array.from(inputNumbers(entry, "G")),
    radarMm: Float64Array.from(inputNumbers(entry, "R")),
  };
}

/** A part of an answer by the name at the end of an entry's id. */
function partOf<T extends object>(entry: CheckValue, prefix: string, parts: T): unknown {
  return (parts as Record<string, unknown>)[entry.id.slice(prefix.length)];
}

function countsBook(a: number, b: number, c: number, d: number) {
  const counts = { hits: a, falseAlarms: b, misses: c, correctNegatives: d };
  const scores = contingencyScores(counts);
  const errors = contingencyStandardErrors(counts);
  const oddsRatio = scores.oddsRatio.value;
  return {
    a,
    b,
    c,
    d,
    base_rate: scores.baseRate.value,
    PC: scores.proportionCorrect.value,
    frequency_bias: scores.frequencyBias.value,
    POD: scores.probabilityOfDetection.value,
    FAR: scores.falseAlarmRatio.value,
    // By definition: the share of the radar's events that were none is FAR.
    success_ratio: 1 - scores.falseAlarmRatio.value,
    POFD: scores.probabilityOfFalseDetection.value,
    CSI: scores.criticalSuccessIndex.value,
    GSS: scores.equitableThreatScore.value,
    HSS: scores.heidkeSkillScore.value,
    PSS: scores.peirceSkillScore.value,
    odds_ratio: oddsRatio,
    log_odds_ratio: Math.log(oddsRatio),
    yule_Q: scores.oddsRatioSkillScore.value,
    EDI: scores.extremalDependencyIndex.value,
    SEDI: scores.symmetricExtremalDependencyIndex.value,
    se_POD_binomial: errors.probabilityOfDetection,
    se_PSS: errors.peirceSkillScore,
    se_log_odds_ratio: errors.logOddsRatio,
    se_EDI_delta_independent: errors.extremalDependencyIndex,
    se_SEDI_delta_independent: errors.symmetricExtremalDependencyIndex,
  };
}

function countsOf(entry: CheckValue) {
  const [a, b, c, d] = ["a", "b", "c", "d"].map((key) => inputNumber(entry, key));
  return countsBook(a, b, c, d);
}

/** What every resample of an exhaustive bootstrap gives, summarised as the check values do. */
function distribution(values: number[]) {
  const ascending = Float64Array.from(values).sort();
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  const square = values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / values.length;
  const shares = ["0.025", "0.05", "0.5", "0.95", "0.975"];
  return {
    mean,
    sd_population: Math.sqrt(square),
    quantile_type7: Object.fromEntries(shares.map((share) => [share, percentile(ascending, Number(share))])),
    min: ascending[0],
    max: ascending[ascending.length - 1],
    distinct_values: new Set(values.map((value) => value.toFixed(12))).size,
  };
}

/** One score for given weights of the pairs, each pair its own unit. */
function weighted(pairs: DepthPairs, name: "biasRatio" | "meanErrorMm") {
  const n = pairs.gaugeMm.length;
  const evaluator = additiveEvaluator(pairs, {
    unitOf: Uint32Array.from({ length: n }, (_, i) => i),
    unitCount: n,
  });
  const out = new Float64Array(evaluator.names.length);
  return (weights: Float64Array) => {
    evaluator.evaluate(weights, out);
    return out[evaluator.names.indexOf(name)];
  };
}

/** Every resample of whole circular blocks, by running through all starts of all blocks. */
function enumerateBlocks(pairs: DepthPairs, blockLength: number): number[] {
  const n = pairs.gaugeMm.length;
  const blocks = n / blockLength;
  const score = weighted(pairs, "biasRatio");
  return Array.from({ length: n ** blocks }, (_, code) => {
    const weights = new Float64Array(n);
    for (let block = 0, rest = code; block < blocks; block++, rest = Math.floor(rest / n)) {
      addCircularBlock(weights, rest % n, blockLength);
    }
    return score(weights);
  });
}

/** Exact mean and standard error of the resampled mean error: blocks are drawn independently. */
function blockMoments(blockLength: number, starts: number) {
  const n = pairs24.gaugeMm.length;
  const score = weighted(pairs24, "meanErrorMm");
  const means = Array.from({ length: starts }, (_, start) => {
    const weights = new Float64Array(n);
    addCircularBlock(weights, start, blockLength);
    return score(weights);
  });
  const mean = means.reduce((sum, value) => sum + value, 0) / starts;
  const variance = means.reduce((sum, value) => sum + (value - mean) ** 2, 0) / starts;
  return { mean, se: Math.sqrt(variance / (n / blockLength)) };
}

const wet = pick(pairs24, keptBy("both", pairs24, 1e-6));
const LEVEL_95 = 0.95;
const NOT_SHOWN = "no command shows this score";

runReferenceSuite({
  topics: ["a-continuous-scores", "b-contingency", "c-fss"],
  adapters: [
    [
      /^a-cond-(both|either)-ge/,
      (entry) => {
        const rule = entry.inputs.condition as "both" | "either";
        return continuousBook(pick(pairs24, keptBy(rule, pairs24, inputNumber(entry, "threshold_mm"))));
      },
    ],
    [/^a-all-(?!(kendall|willmott|ols|slope))/, (entry) => partOf(entry, "a-all-", continuousBook(pairs24))],
    ["a-double", (entry) => ({ ...continuousBook(depths(entry)), ...ratioBook(depths(entry)) })],
    ["a-log-both-ge1", () => ratioBook(pick(pairs24, keptBy("both", pairs24, 1)))],
    ["a-log-*", (entry) => partOf(entry, "a-log-", ratioBook(wet))],
    [
      "a-range-bins",
      () => {
        const inBand = (from: number, to: number) =>
          continuousBook(
            pick(
              pairs24,
              [...pairs24.rangeKm.keys()].filter(
                (i) => pairs24.rangeKm[i] >= from && pairs24.rangeKm[i] < to,
              ),
            ),
          );
        return { "0-50": inBand(0, 50), "50-100": inBand(50, 100), "100-150": inBand(100, 150) };
      },
    ],
    [
      "a-identity-rmse",
      () => {
        const { rmse, mean_error, error_sd_population } = continuousBook(pairs24);
        return { left: rmse ** 2, right: mean_error ** 2 + error_sd_population ** 2 };
      },
    ],
    [
      "a-identity-nse-kge",
      () => {
        const { nse, kge_alpha, pearson_r, mean_error } = continuousBook(pairs24);
        const n = pairs24.gaugeMm.length;
        const mean = pairs24.gaugeMm.reduce((sum, g) => sum + g, 0) / n;
        const variance = pairs24.gaugeMm.reduce((sum, g) => sum + (g - mean) ** 2, 0) / n;
        return { nse, right: 2 * kge_alpha * pearson_r - kge_alpha ** 2 - mean_error ** 2 / variance };
      },
    ],
    [
      "a-nse-mean-benchmark",
      () => {
        const gaugeMm = Float64Array.of(1, 2, 6);
        return additiveScores({ gaugeMm, radarMm: Float64Array.of(3, 3, 3) }).nashSutcliffe.value;
      },
    ],
    [
      "a-ratio-order",
      (entry) => {
        const pairs = depths(entry);
        const ratios = Array.from(pairs.gaugeMm, (_, i) => continuousBook(pick(pairs, [i])).ratio);
        return {
          ...continuousBook(pairs),
          ...ratioBook(pairs),
          mean_of_ratios: ratios.reduce((sum, ratio) => sum + ratio, 0) / ratios.length,
        };
      },
    ],
    [
      "a-spearman-ties",
      (entry) =>
        additiveScores({
          gaugeMm: Float64Array.from(inputNumbers(entry, "x")),
          radarMm: Float64Array.from(inputNumbers(entry, "y")),
        }).spearmanCorrelation.value,
    ],
    [
      "a-undefined",
      () => {
        const of = (gauge: number[], radar: number[]) =>
          continuousBook({ gaugeMm: Float64Array.from(gauge), radarMm: Float64Array.from(radar) });
        const none = of([], []);
        const oneDefined = Number.isFinite(of([2], [3]).rmse) ? "defined" : "undefined";
        const scoresOfNone = Object.entries(none).filter(
          ([name]) => name !== "n" && Number.isFinite(none[name as "nse"]),
        );
        const noneBoth = Object.values(ratioScores(pick(pairs24, []))).filter(
          ({ value }) => !Number.isNaN(value),
        );
        return {
          "sumG=0": of([0, 0], [1, 2]),
          "G constant": of([2, 2, 2], [1, 2, 3]),
          "R constant": {
            pearson_r: of([1, 2, 3], [2, 2, 2]).pearson_r,
            kge2009: of([1, 2, 3], [2, 2, 2]).kge2009,
          },
          "n=0": scoresOfNone.length === 0 ? "all null" : scoresOfNone,
          "n=1": { pearson_r: of([2], [3]).pearson_r, nse: of([2], [3]).nse, rmse: oneDefined },
          "no pair with R>0 and G>0": noneBoth.length === 0 ? "all log scores null" : noneBoth,
        };
      },
    ],
    [
      "b-finley-pub-rounded",
      (entry) => {
        const { PC, FAR, CSI, PSS } = countsOf(entry);
        return {
          accuracy_percent: 100 * PC,
          FAR_percent: 100 * FAR,
          CSI_percent: 100 * CSI,
          PSS_percent: 100 * PSS,
        };
      },
    ],
    [
      "b-finley-table",
      (entry) => {
        const { a, b, c, n } = entry.expected as Record<string, number>;
        const radarMm = Float64Array.from({ length: n }, (_, i) => (i < a + b ? 1 : 0));
        const gaugeMm = Float64Array.from({ length: n }, (_, i) =>
          i < a || (i >= a + b && i < a + b + c) ? 1 : 0,
        );
        const counts = contingencyCounts({ gaugeMm, radarMm }, 1);
        const { hits, falseAlarms, misses, correctNegatives } = counts;
        return {
          a: hits,
          b: falseAlarms,
          c: misses,
          d: correctNegatives,
          n: hits + falseAlarms + misses + correctNegatives,
        };
      },
    ],
    [
      "b-finley-noforecast",
      (entry) => {
        const { PC } = countsOf(entry);
        return { PC, percent_published: Number((100 * PC).toFixed(1)) };
      },
    ],
    [
      /^b-finley-(?!(table|pub|noforecast|clayton|doolittle|yule_Y|EDS|SEDS|se_EDI_fs2011|random_hits))/,
      (entry) => partOf(entry, "b-finley-", countsOf(entry)),
    ],
    [
      /^b-pairs24-ge/,
      (entry) => {
        const counts = contingencyCounts(pairs24, inputNumber(entry, "threshold_mm"));
        return countsBook(counts.hits, counts.falseAlarms, counts.misses, counts.correctNegatives);
      },
    ],
    [/^b-edge-(?!edi)/, countsOf],
    ["b-random-table", countsOf],
    [
      "b-identity-gss-hss",
      (entry) => {
        const { GSS, HSS } = countsOf(entry);
        return { GSS, HSS, "2GSS/(1+GSS)": (2 * GSS) / (1 + GSS) };
      },
    ],
    [
      "b-identity-csi",
      (entry) => {
        const { POD, FAR } = countsBook(28, 72, 23, 2680);
        const off = Math.max(
          Math.abs(POD - inputNumber(entry, "POD")),
          Math.abs(FAR - inputNumber(entry, "FAR")),
        );
        return off < 1e-9 ? 1 / (1 / (1 - FAR) + 1 / POD - 1) : Number.NaN;
      },
    ],
    [
      /^b-wilson-/,
      (entry) => {
        const { low, high } = wilsonInterval(inputNumber(entry, "x"), inputNumber(entry, "n"), LEVEL_95);
        const rounded = [low, high].map((limit) => Number(limit.toFixed(4)));
        return { lower: low, upper: high, published_4_decimals: rounded };
      },
    ],
    [
      "b-boot-exact-ratio",
      (entry) => {
        const pairs = depths(entry);
        return { estimate: continuousBook(pairs).ratio, ...distribution(enumerateBlocks(pairs, 1)) };
      },
    ],
    [
      "b-boot-exact-circular",
      (entry) => {
        const pairs = depths(entry);
        const values = enumerateBlocks(pairs, inputNumber(entry, "block_length"));
        return { estimate: continuousBook(pairs).ratio, ...distribution(values) };
      },
    ],
    ["b-boot-mean-se", () => blockMoments(1, pairs24.gaugeMm.length).se],
    [
      /^b-boot-block-/,
      (entry) => {
        const length = inputNumber(entry, "block_length");
        const n = pairs24.gaugeMm.length;
        // Moving blocks are the circular ones that do not wrap.
        return { circular: blockMoments(length, n), moving: blockMoments(length, n - length + 1) };
      },
    ],
    [
      "b-ratio-se",
      () => {
        const { ratio, linearised, jackknife } = ratioStandardError(pairs24.radarMm, pairs24.gaugeMm);
        return { ratio, se_linearised: linearised, se_jackknife: jackknife };
      },
    ],
  ],
  notApplicable: [
    { id: "c-*", reason: "no command compares two fields yet" },
    {
      id: "a-cond-gauge-*",
      reason: "no command selects pairs on the gauge alone: it makes the radar look too dry",
    },
    { id: "a-weighted-*", reason: "range bands are shown instead of one range-weighted figure" },
    { id: "a-scatter-dB", reason: "no command shows the rain-weighted spread yet" },
    { id: "a-all-kendall_tau_b", reason: NOT_SHOWN },
    { id: "a-all-willmott*", reason: NOT_SHOWN },
    { id: /^a-all-(ols_|slope_)/, reason: "no command shows a regression: it is not a bias" },
    {
      id: "a-kge-mean-benchmark",
      reason: "a constant has no correlation here, so no KGE: the value is a convention",
    },
    { id: "a-perfect", reason: "asks for Willmott's d as well; its other parts are in continuous.test.ts" },
    { id: /^b-finley-(clayton|doolittle|yule_Y|EDS|SEDS)$/, reason: NOT_SHOWN },
    { id: "b-finley-random_hits", reason: "a step inside the equitable threat score" },
    { id: "b-edge-edi-limits", reason: "words, not numbers; its cases are in contingency.test.ts" },
    { id: "b-quantile-types", reason: "asks for types 6 and 8 as well; type 7 is in bootstrap.test.ts" },
  ],
});
