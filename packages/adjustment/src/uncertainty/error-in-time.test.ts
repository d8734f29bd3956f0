import { uniformStream } from "@rainreckon/verification";
import { expect, test } from "vitest";
import { intervalFactor, intervalLogDeviation, learnErrorInTime, varianceOfMean } from "./error-in-time.ts";
import { correlationOfNeighbours } from "./error-member.ts";
import { normalNumber } from "./random-field.ts";

// 2 (u - 1 + exp(-u)) / u² by hand: 1 at 0, 0.735759 at 1, 0.567668 at 2, 2/u for long spans.
test("a mean over a longer span varies less", () => {
  expect(varianceOfMean(0)).toBe(1);
  expect(varianceOfMean(1)).toBeCloseTo(0.735759, 6);
  expect(varianceOfMean(2)).toBeCloseTo(0.567668, 6);
  expect(varianceOfMean(1000)).toBeCloseTo(0.001998, 6);
});

// The variance of a mean over two spans is that of one, times (1 + correlation) / 2.
test("means of neighbouring spans are as alike as their sum tells", () => {
  for (const u of [0.1, 0.5, 1, 3]) {
    expect(varianceOfMean(2 * u) / varianceOfMean(u)).toBeCloseTo((1 + correlationOfNeighbours(u)) / 2, 9);
  }
});

test("what lasts is found again from hours of a 12 h window", () => {
  const uniform = uniformStream(11);
  const planted = { lastingShare: 0.2, hours: 1, windowHours: 12 };
  const excess = intervalFactor(planted, 1) ** 2 - 1;
  const residuals = Array.from({ length: 400 }, () => ({
    logDeviation: Math.sqrt(0.3 ** 2 * excess + 0.05 ** 2) * normalNumber(uniform),
    gaugeLogVariance: 0.05 ** 2,
    windowSpread: 0.3,
  }));
  expect(learnErrorInTime(residuals, 1, 12).lastingShare).toBeGreaterThan(0.12);
  expect(learnErrorInTime(residuals, 1, 12).lastingShare).toBeLessThan(0.3);
});

test("where nothing tells, what is expected stands, and intervals are never surer than the window", () => {
  for (const residuals of [[], [{ logDeviation: 0, gaugeLogVariance: 0, windowSpread: 0 }]]) {
    expect(learnErrorInTime(residuals, 1, 6).lastingShare).toBe(0.5);
  }
  const steady = Array.from({ length: 50 }, () => ({
    logDeviation: 0,
    gaugeLogVariance: 0,
    windowSpread: 0.3,
  }));
  expect(intervalFactor(learnErrorInTime(steady, 1, 6), 1)).toBeGreaterThanOrEqual(1);
  const wild = steady.map((one) => ({ ...one, logDeviation: 9 }));
  expect(learnErrorInTime(wild, 1, 6).lastingShare).toBeGreaterThanOrEqual(0.05);
});

// By hand: ln(2.2 / 1.2) - ln(10.2 / 10.2), and the gauge's 0.1 mm² over 2.2² mm².
test("an interval is held against its window", () => {
  const one = intervalLogDeviation({ gaugeMm: 10, depthMm: 10 }, { gaugeMm: 2, depthMm: 1 }, 0.1, 0.3);
  expect(one.logDeviation).toBeCloseTo(0.606136, 6);
  expect(one.gaugeLogVariance).toBeCloseTo(0.0206612, 6);
});
