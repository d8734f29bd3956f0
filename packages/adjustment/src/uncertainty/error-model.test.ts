import { uniformStream } from "@rainreckon/verification";
import { describe, expect, test } from "vitest";
import { type ErrorPrior, fitSpread, logSpread } from "./error-model.ts";
import { CLEAR_VIEW, inventedResiduals } from "./invented-residuals.ts";
import { learnErrors } from "./learn-errors.ts";
import { randomField } from "./random-field.ts";

const PRIOR: ErrorPrior = { followsGauges: false, rangeKm: 15, gaugesSpread: 0 };
const at = (depthMm: number, gaugeDistanceKm = 8) => ({ depthMm, gaugeDistanceKm, quality: CLEAR_VIEW });

describe("a spread that was planted is found again", () => {
  test.each([0.05, 0.2, 0.6])("%f, the same at all depths", (sigma) => {
    const model = fitSpread(
      inventedResiduals(300, 1, () => sigma),
      PRIOR,
    );
    // 300 residuals tell a spread to within 1 / sqrt(600) = 4 %; at three of that.
    expect(logSpread(model, at(9)) / sigma).toBeGreaterThan(0.88);
    expect(logSpread(model, at(9)) / sigma).toBeLessThan(1.12);
    expect(Math.abs(model.medianLogError)).toBeLessThan(4 * (sigma / Math.sqrt(300)));
  });

  test("falling with the square root of depth", () => {
    const model = fitSpread(
      inventedResiduals(500, 2, (mm) => 0.6 / Math.sqrt(mm)),
      PRIOR,
    );
    expect(model.depthSlope).toBeGreaterThan(0.35);
    expect(logSpread(model, at(4))).toBeCloseTo(0.3, 1);
    expect(logSpread(model, at(25))).toBeCloseTo(0.12, 1);
  });

  test("beside a gauge's own error of known size, which is taken out", () => {
    const residuals = inventedResiduals(400, 3, () => 0.1, 0.1);
    const with0 = fitSpread(
      residuals.map((one) => ({ ...one, gaugeVarianceMm2: 0 })),
      PRIOR,
    );
    // Both together spread by sqrt(0.1² + 0.1²).
    expect(logSpread(with0, at(9))).toBeCloseTo(0.141, 1);
    expect(logSpread(fitSpread(residuals, PRIOR), at(9))).toBeGreaterThan(0.085);
    expect(logSpread(fitSpread(residuals, PRIOR), at(9))).toBeLessThan(0.12);
  });

  test("a tenth of wild residuals does not make the rest as wild", () => {
    const residuals = inventedResiduals(200, 4, () => 0.1).map((one, i) =>
      i % 10 === 0 ? { ...one, gaugeMm: one.gaugeMm * 4 } : one,
    );
    // Their plain standard deviation is sqrt(0.1² + 0.1 × 0.9 × (ln 4)²) = 0.43.
    expect(logSpread(fitSpread(residuals, PRIOR), at(9))).toBeLessThan(0.25);
  });
});

test("with no residual what is expected stands; two hardly move it; none is ever NaN", () => {
  const none = learnErrors([], PRIOR);
  // A scale of 0.3 as Student's t with 8 degrees, as the normal spread of the same p10 and p90: times 1.3968 / 1.2816.
  expect(none.typicalSpread).toBeCloseTo((0.3 * 1.3968) / 1.2816, 3);
  expect(none.rangeKm).toBe(15);
  const two = learnErrors(
    inventedResiduals(2, 5, () => 0.05),
    PRIOR,
  );
  expect(two.typicalSpread).toBeGreaterThan(0.05);
  expect(two.typicalSpread).toBeLessThan(none.typicalSpread);
  for (const model of [none, two]) {
    for (const depthMm of [0, 0.1, 5, 500]) expect(logSpread(model, at(depthMm))).toBeGreaterThan(0);
    expect(logSpread(model, at(5, Number.NaN))).toBeGreaterThan(0);
    expect(logSpread(model, at(5, Number.POSITIVE_INFINITY))).toBeGreaterThan(0);
  }
});

test("residuals that are all the same, all dry, or without a figure give finite models", () => {
  const same = inventedResiduals(20, 6, () => 0).map((one) => ({ ...one, gaugeMm: 10, depthMm: 10 }));
  const dry = same.map((one) => ({ ...one, gaugeMm: 0, depthMm: 0 }));
  const missing = [...same, { ...same[0], depthMm: Number.NaN }];
  for (const residuals of [same, dry, missing]) {
    const model = learnErrors(residuals, PRIOR);
    expect(Object.values(model).every(Number.isFinite)).toBe(true);
    expect(model.residualCount).toBe(20);
    expect(logSpread(model, at(10))).toBeGreaterThan(0);
  }
});

test("errors spread more far from gauges, at small depths and where the view is bad", () => {
  const model = fitSpread([], { ...PRIOR, followsGauges: true });
  const here = logSpread(model, at(10, 2));
  expect(logSpread(model, at(10, 20))).toBeGreaterThan(1.3 * here);
  expect(logSpread(model, at(2, 2))).toBeGreaterThan(1.3 * here);
  const worse = { ...CLEAR_VIEW, beamHeightM: 2000, lossDb: 10, blockedFraction: 0.4 };
  expect(logSpread(model, { ...at(10, 2), quality: worse })).toBeGreaterThan(1.5 * here);
});

test("what is wrong with all gauges adds to every spread, and is learned from none", () => {
  const residuals = inventedResiduals(100, 7, () => 0.1);
  const without = fitSpread(residuals, PRIOR);
  const model = fitSpread(residuals, { ...PRIOR, gaugesSpread: 0.05 });
  expect(model.typicalSpread).toBe(without.typicalSpread);
  expect(logSpread(model, at(9)) ** 2).toBeCloseTo(logSpread(without, at(9)) ** 2 + 0.05 ** 2, 10);
});

test("the distance over which errors are alike is found again within a factor of two", () => {
  const grid = { crs: "", westM: 0, northM: 80_000, cellM: 1000, nx: 80, ny: 80 };
  const found = (rangeKm: number) => {
    const logs = [1, 2, 3, 4].map((seed) => {
      const field = new Float64Array(80 * 80);
      randomField(grid, rangeKm, uniformStream(seed), field);
      const residuals = inventedResiduals(60, 100 + seed, () => 0).map((one) => {
        const cell = Math.floor(80 - one.yKm) * 80 + Math.floor(one.xKm);
        return { ...one, gaugeMm: (one.depthMm + 0.2) * Math.exp(0.3 * field[cell]) - 0.2 };
      });
      return Math.log(learnErrors(residuals, PRIOR).rangeKm);
    });
    return Math.exp(logs.reduce((sum, log) => sum + log, 0) / logs.length);
  };
  expect(found(6)).toBeGreaterThan(3);
  expect(found(6)).toBeLessThan(12);
  expect(found(30)).toBeGreaterThan(15);
  expect(found(30)).toBeLessThan(60);
});
