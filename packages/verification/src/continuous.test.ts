import { checkValue, inputNumbers } from "@rainreckon/test-data/published";
import fc from "fast-check";
import { median, sampleCorrelation, sampleRankCorrelation, sampleStandardDeviation } from "simple-statistics";
import { describe, expect, test } from "vitest";
import { type DepthPairs, keptBy } from "./conditioning.ts";
import { additiveEvaluator, additiveScores, ratioEvaluator, ratioScores } from "./continuous.ts";

const pairsOf = (gauge: readonly number[], radar: readonly number[]): DepthPairs => ({
  gaugeMm: Float64Array.from(gauge),
  radarMm: Float64Array.from(radar),
});
const depth = fc.integer({ min: 0, max: 400 }).map((tenths) => tenths / 10);
const wetDepth = fc.integer({ min: 1, max: 400 }).map((tenths) => tenths / 10);
const manyPairs = (value: typeof depth) => fc.array(fc.tuple(value, value), { minLength: 4, maxLength: 40 });
const settings = { seed: 11, numRuns: 150 };

test("a radar equal to the gauges has every score at its best (check value a-perfect)", () => {
  const entry = checkValue("a-perfect");
  const pairs = pairsOf(inputNumbers(entry, "G"), inputNumbers(entry, "R"));
  const scores = additiveScores(pairs);
  const expected = entry.expected as Record<string, number>;
  expect(scores.biasRatio.value).toBeCloseTo(expected.ratio, 9);
  expect(scores.meanErrorMm.value).toBeCloseTo(expected.mean_error, 9);
  expect(scores.meanAbsoluteErrorMm.value).toBeCloseTo(expected.mae, 9);
  expect(scores.rootMeanSquareErrorMm.value).toBeCloseTo(expected.rmse, 9);
  expect(scores.pearsonCorrelation.value).toBeCloseTo(expected.pearson_r, 9);
  expect(scores.spearmanCorrelation.value).toBeCloseTo(expected.spearman_rho, 9);
  expect(scores.nashSutcliffe.value).toBeCloseTo(expected.nse, 9);
  expect(scores.klingGupta2012.value).toBeCloseTo(expected.kge2012, 9);
  expect(ratioScores(pairs).rootMeanSquareFactor.value).toBeCloseTo(expected.rmsf, 9);
});

describe("against a general-purpose library", () => {
  test("correlation, and the spread and median of log ratios", () => {
    fc.assert(
      fc.property(manyPairs(wetDepth), (rows) => {
        const gauge = rows.map(([g]) => g);
        const radar = rows.map(([, r]) => r);
        const ratiosDb = rows.map(([g, r]) => 10 * Math.log10(r / g));
        fc.pre(new Set(gauge).size > 1 && new Set(radar).size > 1);
        const additive = additiveScores(pairsOf(gauge, radar));
        const ratio = ratioScores(pairsOf(gauge, radar));
        expect(additive.pearsonCorrelation.value).toBeCloseTo(sampleCorrelation(gauge, radar), 9);
        expect(ratio.medianLogRatioDb.value).toBeCloseTo(median(ratiosDb), 9);
        expect(ratio.logRatioSpreadDb.value).toBeCloseTo(sampleStandardDeviation(ratiosDb), 9);
      }),
      settings,
    );
  });

  test("rank correlation without ties", () => {
    const permutation = fc.shuffledSubarray([...new Array(25).keys()], { minLength: 25 });
    fc.assert(
      fc.property(permutation, permutation, (x, y) => {
        const { spearmanCorrelation } = additiveScores(pairsOf(x, y));
        expect(spearmanCorrelation.value).toBeCloseTo(sampleRankCorrelation(x, y), 9);
      }),
      settings,
    );
  });
});

describe("weights", () => {
  // A unit that occurs k times must count like k copies of its pairs.
  test("weighted units give the scores of the pairs written out as often", () => {
    fc.assert(
      fc.property(
        fc.array(fc.tuple(wetDepth, wetDepth, fc.integer({ min: 0, max: 3 })), {
          minLength: 3,
          maxLength: 12,
        }),
        (rows) => {
          const copies = rows.flatMap(([g, r, times]) => new Array(times).fill([g, r] as const));
          fc.pre(copies.length > 0);
          const pairs = pairsOf(
            rows.map(([g]) => g),
            rows.map(([, r]) => r),
          );
          const written = pairsOf(
            copies.map(([g]) => g),
            copies.map(([, r]) => r),
          );
          const units = { unitOf: Uint32Array.from(rows.keys()), unitCount: rows.length };
          const weights = Float64Array.from(rows, ([, , times]) => times);
          for (const [evaluator, plain] of [
            [additiveEvaluator(pairs, units), additiveScores(written)],
            [ratioEvaluator(pairs, units), ratioScores(written)],
          ] as const) {
            const out = new Float64Array(evaluator.names.length);
            evaluator.evaluate(weights, out);
            const expected: Record<string, { value: number }> = plain;
            evaluator.names.forEach((name, k) => {
              const { value } = expected[name];
              if (Number.isNaN(value)) expect(out[k], name).toBeNaN();
              else expect(out[k], name).toBeCloseTo(value, 6);
            });
          }
        },
      ),
      settings,
    );
  });
});

describe("invariances", () => {
  test("the order of pairs changes nothing, a common unit only what carries it", () => {
    fc.assert(
      fc.property(manyPairs(depth), (rows) => {
        const gauge = rows.map(([g]) => g);
        const radar = rows.map(([, r]) => r);
        fc.pre(new Set(gauge).size > 1 && new Set(radar).size > 1);
        const plain = additiveScores(pairsOf(gauge, radar));
        const turned = additiveScores(pairsOf(gauge.toReversed(), radar.toReversed()));
        const inches = additiveScores(
          pairsOf(
            gauge.map((g) => g / 25.4),
            radar.map((r) => r / 25.4),
          ),
        );
        for (const name of [
          "biasRatio",
          "pearsonCorrelation",
          "spearmanCorrelation",
          "nashSutcliffe",
          "klingGupta2012",
        ] as const) {
          expect(turned[name].value).toBeCloseTo(plain[name].value, 9);
          expect(inches[name].value).toBeCloseTo(plain[name].value, 6);
        }
        expect(inches.meanErrorMm.value * 25.4).toBeCloseTo(plain.meanErrorMm.value, 9);
      }),
      settings,
    );
  });
});

describe("undefined is NaN with its reason", () => {
  const all = (gauge: number[], radar: number[]) => additiveScores(pairsOf(gauge, radar));

  test.each([
    ["biasRatio", all([], []), "no pair reaches the threshold on either side"],
    ["biasRatio", all([0, 0], [1, 2]), "the gauges saw no rain in these pairs"],
    ["biasRatioDb", all([1, 2], [0, 0]), "the radar saw no rain in these pairs"],
    ["pearsonCorrelation", all([1], [2]), "needs at least two pairs"],
    ["nashSutcliffe", all([2, 2, 2], [1, 2, 3]), "all gauge depths are equal"],
    ["pearsonCorrelation", all([1, 2, 3], [2, 2, 2]), "all radar depths are equal"],
    // Three times 0.1 is no exact binary number: rounding must not pass for variation.
    ["spearmanCorrelation", all([0.1, 0.1, 0.1], [1, 2, 3]), "all gauge depths are equal"],
    ["pearsonCorrelation", all([0.1, 0.1, 0.1], [1, 2, 3]), "all gauge depths are equal"],
  ] as const)("%s %#", (name, scores, reason) => {
    expect(scores[name]).toEqual({ value: Number.NaN, reason });
  });

  test("a defined score carries no reason", () => {
    expect(all([1, 2], [1, 3]).biasRatio).toEqual({ value: 4 / 3 });
  });

  test("one pair has no spread of log ratios, and none has no log score", () => {
    expect(ratioScores(pairsOf([1], [2])).logRatioSpreadDb.reason).toBe("needs at least two pairs");
    expect(ratioScores(pairsOf([], [])).meanLogRatioDb.reason).toBe(
      "no pair reaches the threshold on both sides",
    );
  });
});

test("0.1 + 0.2 reaches a threshold of 0.3", () => {
  expect(keptBy("both", pairsOf([0.3], [0.1 + 0.2]), 0.1 + 0.2)).toEqual([0]);
  expect(keptBy("both", pairsOf([0.7 + 0.1], [0.8]), 0.8)).toEqual([0]);
});

test("thresholds may differ from pair to pair", () => {
  expect(keptBy("either", pairsOf([0.3, 0.3], [0, 0]), Float64Array.of(0.2, 0.5))).toEqual([0]);
});

test("depths that are missing or a ratio of nothing are a caller's mistake", () => {
  expect(() => additiveScores(pairsOf([Number.NaN], [1]))).toThrow(RangeError);
  expect(() => additiveScores(pairsOf([1, 2], [1]))).toThrow(RangeError);
  expect(() => ratioScores(pairsOf([0], [1]))).toThrow(RangeError);
});
