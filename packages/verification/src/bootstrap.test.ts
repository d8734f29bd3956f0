import { type CheckValue, checkValue, inputNumbers } from "@rainreckon/test-data/published";
import { describe, expect, test } from "vitest";
import { bootstrapIntervals, resampledScores } from "./bootstrap.ts";
import type { DepthPairs } from "./conditioning.ts";
import { additiveEvaluator } from "./continuous.ts";
import type { Evaluator } from "./evaluator.ts";
import { percentile } from "./percentile.ts";
import { uniformStream, xoshiro128 } from "./random.ts";

const SAMPLES = 40_000;

/** Each pair its own unit. */
function evaluatorOf(pairs: DepthPairs) {
  const unitCount = pairs.gaugeMm.length;
  return additiveEvaluator(pairs, {
    unitOf: Uint32Array.from({ length: unitCount }, (_, i) => i),
    unitCount,
  });
}

function pairsOf(entry: CheckValue): DepthPairs {
  return {
    gaugeMm: Float64Array.from(inputNumbers(entry, "G")),
    radarMm: Float64Array.from(inputNumbers(entry, "R")),
  };
}

function momentsOf(values: Float64Array) {
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  const variance = values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / values.length;
  return { mean, sd: Math.sqrt(variance) };
}

// The exact distributions (all 256 and all 216 equally likely resamples) were enumerated elsewhere; the
// bounds are five standard errors of Monte Carlo: sd / sqrt(N) for the mean, and for the sd, whose own
// error is at most sd / sqrt(N) for a kurtosis up to 5.
describe("random resampling comes to the exact distribution", () => {
  test.each([
    ["b-boot-exact-ratio", 1],
    ["b-boot-exact-circular", 2],
  ])("%s", (id, blockLength) => {
    const entry = checkValue(id);
    const exact = entry.expected as {
      mean: number;
      sd_population: number;
      quantile_type7: Record<string, number>;
    };
    const pairs = pairsOf(entry);
    const settings = { seed: 1, samples: SAMPLES };
    const { biasRatio } = resampledScores(evaluatorOf(pairs), pairs.gaugeMm.length, blockLength, settings);
    const { mean, sd } = momentsOf(biasRatio);
    const bound = (5 * exact.sd_population) / Math.sqrt(SAMPLES);
    expect(Math.abs(mean - exact.mean)).toBeLessThan(bound);
    expect(Math.abs(sd - exact.sd_population)).toBeLessThan(bound);
    expect(percentile(biasRatio.slice().sort(), 0.5)).toBeCloseTo(exact.quantile_type7["0.5"], 9);
  });

  test.each([1, 3, 6])("the mean error of 24 hours in circular blocks of %i", (blockLength) => {
    const table = checkValue("a-pairs24-table").expected as { gauge_mm: number[]; radar_mm: number[] };
    const pairs = { gaugeMm: Float64Array.from(table.gauge_mm), radarMm: Float64Array.from(table.radar_mm) };
    const { circular } = checkValue(`b-boot-block-${blockLength}`).expected as {
      circular: { mean: number; se: number };
    };
    const scores = resampledScores(evaluatorOf(pairs), 24, blockLength, { seed: 2, samples: SAMPLES });
    const { mean, sd } = momentsOf(scores.meanErrorMm);
    const bound = (5 * circular.se) / Math.sqrt(SAMPLES);
    expect(Math.abs(mean - circular.mean)).toBeLessThan(bound);
    expect(Math.abs(sd - circular.se)).toBeLessThan(bound);
  });
});

describe("limits", () => {
  const pairs = pairsOf(checkValue("b-boot-exact-circular"));

  test("are the percentiles of the resampled scores, the same for the same seed", () => {
    const settings = { seed: 3, samples: 999, level: 0.9 };
    const first = bootstrapIntervals(evaluatorOf(pairs), 6, 2, settings);
    const again = bootstrapIntervals(evaluatorOf(pairs), 6, 2, settings);
    expect(again).toEqual(first);
    const drawn = resampledScores(evaluatorOf(pairs), 6, 2, settings).meanErrorMm;
    const otherSeed = resampledScores(evaluatorOf(pairs), 6, 2, { ...settings, seed: 4 }).meanErrorMm;
    expect(otherSeed).not.toEqual(drawn);
    const sorted = drawn.slice().sort();
    // By hand: type 7 of 999 values puts 5 % at place 49.9 and 95 % at place 948.1, counted from 0.
    expect(first.meanErrorMm.low).toBeCloseTo(0.1 * sorted[49] + 0.9 * sorted[50], 12);
    expect(first.meanErrorMm.high).toBeCloseTo(0.9 * sorted[948] + 0.1 * sorted[949], 12);
  });

  test("a score undefined too often has none, with the reason", () => {
    const evaluator: Evaluator<"score"> = {
      names: ["score"],
      // Undefined unless unit 0 is drawn: (7/8)^8 = 34 % of the resamples.
      evaluate: (weights, out) => {
        out[0] = weights[0] > 0 ? weights[0] : Number.NaN;
      },
    };
    const { score } = bootstrapIntervals(evaluator, 8, 1, { seed: 1, samples: 1000, level: 0.9 });
    expect(score.low).toBeNaN();
    expect(score.high).toBeNaN();
    expect(score.reason).toMatch(/^undefined in \d+ of 1000 resamples$/);
  });

  test("every resample holds as many units as the sample, also where blocks do not divide it", () => {
    const sizes = new Set<number>();
    const evaluator: Evaluator<"size"> = {
      names: ["size"],
      evaluate: (weights, out) => {
        out[0] = weights.reduce((sum, weight) => sum + weight, 0);
        sizes.add(out[0]);
      },
    };
    resampledScores(evaluator, 10, 3, { seed: 1, samples: 50 });
    expect([...sizes]).toEqual([10]);
  });

  test("a block longer than the sample is a caller's mistake", () => {
    expect(() => resampledScores(evaluatorOf(pairs), 6, 7, { seed: 1, samples: 1 })).toThrow(RangeError);
  });
});

describe("percentiles", () => {
  test("are of type 7 (check value b-quantile-types, from R)", () => {
    const entry = checkValue("b-quantile-types");
    const { type7 } = entry.expected as { type7: number };
    expect(percentile(inputNumbers(entry, "x"), 0.1)).toBeCloseTo(type7, 9);
  });

  test("reach both ends, and are NaN for no values", () => {
    expect([percentile([1, 5], 0), percentile([1, 5], 1)]).toEqual([1, 5]);
    expect(percentile([], 0.5)).toBeNaN();
    expect(() => percentile([1], 1.1)).toThrow(RangeError);
  });
});

describe("random numbers", () => {
  // From state 1, 2, 3, 4, three steps of the published recurrence by hand:
  // rotl(2 * 5, 7) * 9 = 11520; then s = (7, 0, 1026, 12288): 0; then s = (12295, 1029, 1029, 25165824):
  // rotl(1029 * 5, 7) * 9 = 5927040.
  test("follow the published recurrence", () => {
    const next = xoshiro128([1, 2, 3, 4]);
    expect([next(), next(), next()]).toEqual([11520, 0, 5927040]);
  });

  test("fill 20 equal cells evenly: chi-square below its 99.9 % point of 43.8 for 19 degrees of freedom", () => {
    const next = uniformStream(12345);
    const cells = new Float64Array(20);
    for (let i = 0; i < 20_000; i++) cells[Math.floor(next() * 20)]++;
    const chiSquare = cells.reduce((sum, count) => sum + (count - 1000) ** 2 / 1000, 0);
    expect(chiSquare).toBeLessThan(43.8);
  });

  test("a seed that is no whole number is a caller's mistake", () => {
    expect(() => uniformStream(0.5)).toThrow(RangeError);
    expect(() => uniformStream(-1)).toThrow(RangeError);
  });
});
