import { describe, expect, test } from "vitest";
import { normalQuantile } from "../normal.ts";
import { uniformStream } from "../random.ts";
import { fitRelations, type RelationFitName } from "./fit-relations.ts";
import { logFits } from "./log-fits.ts";
import { matchedLaw } from "./probability-matching.ts";
import type { PairUnits } from "./resample-pairs.ts";
import { biasFreeFit, biasFreeLaw, relationError } from "./sum-fits.ts";
import { choosePairs, type ZrPairs } from "./zr-pairs.ts";

const REFERENCE = { a: 200, b: 1.6 };
const BOOTSTRAP = { seed: 1, samples: 60, level: 0.9 };
const SETTINGS = { leastRateMmPerHour: 0.1, reference: REFERENCE, bootstrap: BOOTSTRAP };

/** For what no interval is asked of. */
const FEW_DRAWS = { ...SETTINGS, leastRateMmPerHour: 1e-6, bootstrap: { ...BOOTSTRAP, samples: 2 } };

interface Planted {
  readonly a: number;
  readonly b: number;
  readonly count?: number;
  /** Middle and spread of log10 R. */
  readonly middle?: number;
  readonly spread?: number;
  /** Spreads of the errors, decibels of Z and of R. */
  readonly noiseZDb?: number;
  readonly noiseRDb?: number;
  readonly seed?: number;
}

/** Pairs of a known relation with log-normal rain and log-normal errors on either side. */
function planted(options: Planted): ZrPairs {
  const { a, b, count = 600, middle = 0.4, spread = 0.45, noiseZDb = 0, noiseRDb = 0, seed = 7 } = options;
  const uniform = uniformStream(seed);
  const normal = () => normalQuantile(Math.min(0.9999, Math.max(0.0001, uniform())));
  const dbz = new Float64Array(count);
  const rateMmPerHour = new Float64Array(count);
  for (let i = 0; i < count; i++) {
    const logR = middle + spread * normal();
    dbz[i] = 10 * (Math.log10(a) + b * logR) + noiseZDb * normal();
    rateMmPerHour[i] = 10 ** (logR + (noiseRDb * normal()) / 10);
  }
  return { dbz, rateMmPerHour };
}

/** Gauges of equal standing, one pair an hour each. */
function unitsOf(count: number, gaugeCount = 20): PairUnits {
  return {
    gaugeOf: Uint32Array.from({ length: count }, (_, i) => i % gaugeCount),
    gaugeCount,
    timeOf: Uint32Array.from({ length: count }, (_, i) => Math.floor(i / gaugeCount)),
    timeCount: Math.ceil(count / gaugeCount),
    blockLength: 2,
  };
}

function fitted(pairs: ZrPairs, settings = SETTINGS) {
  const result = fitRelations(pairs, unitsOf(pairs.dbz.length), settings);
  const of = (name: RelationFitName) => result.fits.find((fit) => fit.name === name)!;
  return { result, of };
}

const ones = (pairs: ZrPairs) => new Float64Array(pairs.dbz.length).fill(1);

describe("pairs of a known relation", () => {
  test("without noise every fit with a free exponent returns it", () => {
    const { result, of } = fitted(planted({ a: 300, b: 1.4 }));
    for (const name of [
      "rate-on-reflectivity",
      "reflectivity-on-rate",
      "reduced-major-axis",
      "bias-free",
      "probability-matching",
    ] as const) {
      expect(of(name).b, name).toBeCloseTo(1.4, 5);
      expect(of(name).a / 300, name).toBeCloseTo(1, 4);
    }
    expect(result.doubts).toEqual([]);
    expect(result.offered).toBe("bias-free");
  });

  // Regression dilution, by hand, with s2 the variance of log R and e2 that of the noise. Noise on R: log Z on log R is
  // flattened by s2 / (s2 + e2), log R on log Z keeps b. Noise on Z: log Z on log R keeps b, and the slope of log R on
  // log Z is b s2 / (b2 s2 + e2), which turned round is b + e2 / (b s2).
  test("noise on R flattens log Z on log R by the known share and leaves log R on log Z", () => {
    const { of } = fitted(planted({ a: 300, b: 1.4, noiseRDb: 2.25, count: 20_000 }), FEW_DRAWS);
    expect(of("reflectivity-on-rate").b).toBeCloseTo(1.4 * (0.45 ** 2 / (0.45 ** 2 + 0.225 ** 2)), 1);
    expect(of("rate-on-reflectivity").b).toBeCloseTo(1.4, 1);
  });

  test("noise on Z leaves log Z on log R and steepens log R on log Z by the known share", () => {
    const { of } = fitted(planted({ a: 300, b: 1.4, noiseZDb: 3, count: 20_000 }), FEW_DRAWS);
    expect(of("reflectivity-on-rate").b).toBeCloseTo(1.4, 1);
    expect(of("rate-on-reflectivity").b).toBeCloseTo(1.4 + 0.3 ** 2 / (1.4 * 0.45 ** 2), 1);
  });

  test.each([1, 2, 3, 4, 5])(
    "noise on both sides: the regressions bracket b, the axis lies between (seed %i)",
    (seed) => {
      const { of } = fitted(
        planted({ a: 250, b: 1.5, noiseZDb: 2, noiseRDb: 1.3, seed, count: 2000 }),
        FEW_DRAWS,
      );
      const [flat, axis, steep] = [
        of("reflectivity-on-rate").b,
        of("reduced-major-axis").b,
        of("rate-on-reflectivity").b,
      ];
      expect(flat).toBeLessThan(1.5);
      expect(steep).toBeGreaterThan(1.5);
      expect(axis).toBeGreaterThan(flat);
      expect(axis).toBeLessThan(steep);
      expect(axis).toBeCloseTo(Math.sqrt(flat * steep), 10);
    },
  );

  test("90 % intervals of b hold the planted exponent in most of twenty samples, and not because they are endless", () => {
    let held = 0;
    for (let seed = 1; seed <= 20; seed++) {
      const fit = fitted(planted({ a: 250, b: 1.5, noiseZDb: 1.5, seed, count: 300 })).of(
        "reflectivity-on-rate",
      );
      if (fit.bInterval.low <= 1.5 && fit.bInterval.high >= 1.5) held++;
      expect(fit.bInterval.high - fit.bInterval.low).toBeLessThan(0.3);
    }
    expect(held).toBeGreaterThanOrEqual(16);
  });

  test("bias-free fits keep the sum of rain, logarithms do not", () => {
    const { of } = fitted(planted({ a: 250, b: 1.5, noiseZDb: 2, noiseRDb: 1.5 }));
    expect(of("bias-free").error.biasRatio).toBeCloseTo(1, 10);
    expect(of("fixed-b").error.biasRatio).toBeCloseTo(1, 10);
    expect(of("fixed-b").b).toBe(1.6);
    expect(Math.abs(of("reflectivity-on-rate").error.biasRatio - 1)).toBeGreaterThan(0.02);
    expect(of("bias-free").error.rootMeanSquareErrorMmPerHour).toBeLessThanOrEqual(
      of("fixed-b").error.rootMeanSquareErrorMmPerHour,
    );
  });
});

describe("by hand", () => {
  // log R = 0, 1, 2 and log Z = 2, 4, 5: slope of log Z on log R 3/2, through the means (1, 11/3), so log A = 13/6.
  // Of log R on log Z: sum of products 3, of squares of log Z 14/3, so slope 9/14 and b = 14/9; log A = 11/3 - 14/9.
  const three: ZrPairs = { dbz: Float64Array.of(20, 40, 50), rateMmPerHour: Float64Array.of(1, 10, 100) };

  test("three points", () => {
    const { reflectivityOnRate, rateOnReflectivity, reducedMajorAxis, correlation } = logFits(
      three,
      ones(three),
    );
    expect(reflectivityOnRate.b).toBeCloseTo(1.5, 12);
    expect(Math.log10(reflectivityOnRate.a)).toBeCloseTo(13 / 6, 12);
    expect(rateOnReflectivity.b).toBeCloseTo(14 / 9, 12);
    expect(Math.log10(rateOnReflectivity.a)).toBeCloseTo(11 / 3 - 14 / 9, 12);
    expect(reducedMajorAxis.b).toBeCloseTo(Math.sqrt(7 / 3), 12);
    expect(correlation).toBeCloseTo(Math.sqrt(27 / 28), 12);
  });

  test("a weight of 2 is the same pair twice", () => {
    const twice: ZrPairs = {
      dbz: Float64Array.of(20, 40, 40, 50),
      rateMmPerHour: Float64Array.of(1, 10, 10, 100),
    };
    const weighted = logFits(three, [1, 2, 1]);
    const doubled = logFits(twice, ones(twice));
    expect(weighted.rateOnReflectivity.b).toBeCloseTo(doubled.rateOnReflectivity.b, 12);
    expect(weighted.reducedMajorAxis.a).toBeCloseTo(doubled.reducedMajorAxis.a, 8);
    expect(biasFreeLaw(three, 1.5, [1, 2, 1]).a).toBeCloseTo(biasFreeLaw(twice, 1.5, ones(twice)).a, 8);
    expect(matchedLaw(three, 0.1)([1, 2, 1]).b).toBeCloseTo(matchedLaw(twice, 0.1)(ones(twice)).b, 10);
  });

  test("a weight of 0 is no pair at all, even one that is spoilt", () => {
    const spoilt: ZrPairs = {
      dbz: Float64Array.of(20, 40, 50, Number.NEGATIVE_INFINITY),
      rateMmPerHour: Float64Array.of(1, 10, 100, 0),
    };
    expect(logFits(spoilt, [1, 1, 1, 0]).reflectivityOnRate.b).toBeCloseTo(1.5, 12);
  });

  // Z = 100 and 900 with R = 1 and 4: at b = 2 roots are 10 and 30, so A = (40 / 5)^2 = 64.
  test("the A that keeps the sum", () => {
    const two: ZrPairs = {
      dbz: Float64Array.of(20, 10 * Math.log10(900)),
      rateMmPerHour: Float64Array.of(1, 4),
    };
    expect(biasFreeLaw(two, 2, [1, 1]).a).toBeCloseTo(64, 10);
    // Its rates are 1.25 and 3.75: errors of a quarter each.
    const error = relationError(two, { a: 64, b: 2 });
    expect(error.rootMeanSquareErrorMmPerHour).toBeCloseTo(0.25, 10);
    expect(error.relativeErrorPercent).toBeCloseTo(10, 10);
  });

  test("a dry radar under a wet gauge counts in the sums, and not in the logarithms", () => {
    const pairs: ZrPairs = {
      dbz: Float64Array.of(Number.NEGATIVE_INFINITY, 23.0103, 10, -10),
      rateMmPerHour: Float64Array.of(1, 1, 0, 0),
    };
    expect(choosePairs(pairs, 0.5, 18.2)).toEqual({ both: [1], either: [0, 1] });
    // Half the rain is missed: A must fall to make up for it, by 2^1.6.
    expect(biasFreeLaw(pairs, 1.6, [1, 1, 0, 0]).a).toBeCloseTo(200 / 2 ** 1.6, 2);
  });
});

describe("probability matching", () => {
  test("finds a relation whose two sides are in no common order", () => {
    const pairs = planted({ a: 220, b: 1.55 });
    const shuffled: ZrPairs = {
      dbz: pairs.dbz.map((_, i) => pairs.dbz[(i * 217) % pairs.dbz.length]),
      rateMmPerHour: pairs.rateMmPerHour,
    };
    const law = matchedLaw(shuffled, 1e-6)(ones(shuffled));
    expect(law.b).toBeCloseTo(1.55, 8);
    expect(law.a).toBeCloseTo(220, 4);
    // What speaks against it is the correlation, which is told.
    expect(Math.abs(fitted(shuffled).result.correlation || 0)).toBeLessThan(0.3);
  });

  test("matches the dry share first: extra echo below the gauges' rain changes nothing", () => {
    const pairs = planted({ a: 220, b: 1.55, count: 200 });
    const lightest = Math.min(...pairs.dbz);
    const more: ZrPairs = {
      dbz: Float64Array.of(...pairs.dbz, ...Array.from({ length: 50 }, (_, k) => lightest - 1 - k)),
      rateMmPerHour: Float64Array.of(...pairs.rateMmPerHour, ...new Float64Array(50)),
    };
    const least = Math.min(...pairs.rateMmPerHour);
    expect(matchedLaw(more, least)(ones(more)).b).toBeCloseTo(1.55, 8);
  });

  test("the quantiles rise together, and a monotone curve that is no power law is met by them", () => {
    const curved = planted({ a: 220, b: 1.55 });
    const bent = {
      ...curved,
      rateMmPerHour: curved.dbz.map((dbz) => 0.02 * Math.exp(0.002 * (dbz + 20) ** 2)),
    };
    const { matched } = fitted(bent).result;
    expect(matched.length).toBe(8);
    for (const { dbz, rateMmPerHour } of matched) {
      expect(rateMmPerHour / (0.02 * Math.exp(0.002 * (dbz + 20) ** 2))).toBeCloseTo(1, 1);
    }
  });
});

describe("pairs that cannot tell A from b", () => {
  test("a narrow range of rates is said to be one, and b is held", () => {
    const { result, of } = fitted(planted({ a: 300, b: 1.4, middle: 0.8, spread: 0.04, noiseZDb: 1.5 }));
    expect(result.doubts.map(({ kind }) => kind)).toContain("spread of rates");
    expect(result.conditionIndex).toBeGreaterThan(10);
    expect(result.offered).toBe("fixed-b");
    // Where the pairs are, the reflectivity is known for all that: 24.77 + 14 * 0.8 dBZ.
    expect(of("fixed-b").pivotDbz).toBeCloseTo(24.77 + 11.2, 0);
    expect(of("fixed-b").pivotInterval.high - of("fixed-b").pivotInterval.low).toBeLessThan(1);
    expect(Math.abs(of("reflectivity-on-rate").logACorrelation)).toBeGreaterThan(0.95);
  });

  test("scatter without a line is told by the regressions both ways", () => {
    const { result } = fitted(planted({ a: 300, b: 1.4, noiseZDb: 6, noiseRDb: 3 }));
    expect(result.doubts.map(({ kind }) => kind)).toContain("scatter");
    expect(result.offered).toBe("fixed-b");
  });

  test("few gauges and few times leave no interval, with the reason, and b is held", () => {
    const pairs = planted({ a: 300, b: 1.4, count: 12 });
    const result = fitRelations(pairs, { ...unitsOf(12, 4), blockLength: 1 }, SETTINGS);
    expect(result.drawn).toMatch(/no intervals: fewer than 8 gauges and fewer than 8 blocks/);
    expect(result.fits[0]!.bInterval.low).toBeNaN();
    expect(result.fits[0]!.b).toBeCloseTo(1.4, 5);
    expect(result.doubts.map(({ kind }) => kind)).toContain("no intervals");
  });
});

describe("input that gives no relation", () => {
  test("nine pairs are too few: each fit says so, none is offered", () => {
    const { result } = fitted(planted({ a: 300, b: 1.4, count: 9 }));
    expect(result.offered).toBeUndefined();
    for (const fit of result.fits)
      expect([fit.b, fit.reason]).toEqual([Number.NaN, expect.stringMatching(/9 pairs/)]);
  });

  test.each([
    ["all of one reflectivity", () => 30, (i: number) => 1 + i / 10],
    ["all of one rate", (i: number) => 20 + i / 10, () => 2],
    ["the more echo the less rain", (i: number) => 20 + i / 10, (i: number) => 10 - i / 20],
  ])("%s: no line, and no crash", (_, dbzOf, rateOf) => {
    const indices = Float64Array.from({ length: 100 }, (_, i) => i);
    const { of } = fitted({ dbz: indices.map(dbzOf), rateMmPerHour: indices.map(rateOf) });
    expect(of("reduced-major-axis").b).toBeNaN();
    expect(of("reduced-major-axis").reason).toMatch(/alike|does not rise/);
    expect(of("rate-on-reflectivity").bInterval.low).toBeNaN();
  });

  test("all dry, and none at all", () => {
    const dry = {
      dbz: new Float64Array(50).fill(Number.NEGATIVE_INFINITY),
      rateMmPerHour: new Float64Array(50),
    };
    expect(fitted(dry).result.offered).toBeUndefined();
    expect(fitted(dry).result.cover.bothCount).toBe(0);
    expect(biasFreeFit(dry, ones(dry)).b).toBeNaN();
  });

  test.each([
    ["NaN reflectivity", Number.NaN, 1],
    ["NaN rate", 20, Number.NaN],
    ["a rate below 0", 20, -1],
    ["reflectivity without end", Number.POSITIVE_INFINITY, 1],
  ])("%s is refused", (_, dbz, rate) => {
    const pairs = { dbz: Float64Array.of(dbz), rateMmPerHour: Float64Array.of(rate) };
    expect(() => choosePairs(pairs, 0.1, 0)).toThrow(/is no pair/);
  });

  test("the same seed gives the same intervals, another one others", () => {
    const pairs = planted({ a: 300, b: 1.4, noiseZDb: 2, count: 100 });
    const once = fitted(pairs).of("bias-free").bInterval;
    expect(fitted(pairs).of("bias-free").bInterval).toEqual(once);
    const other = fitted(pairs, { ...SETTINGS, bootstrap: { ...BOOTSTRAP, seed: 2 } }).of(
      "bias-free",
    ).bInterval;
    expect(other).not.toEqual(once);
  });
});
