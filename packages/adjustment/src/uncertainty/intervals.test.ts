import { describe, expect, test } from "vitest";
import { fitSpread } from "./error-model.ts";
import { areaRange, intervalRange, pointRange } from "./intervals.ts";

const MODEL = fitSpread([], { followsGauges: false, rangeKm: 10, gaugesSpread: 0 });

describe("a point", () => {
  // By hand: median 9.8 + 0.2 = 10, spread 0.2: 10 exp(∓1.28155 × 0.2) = 7.7389 and 12.9217, less 0.2;
  // mean 10 exp(0.02) = 10.2020; standard error 10.2020 sqrt(exp(0.04) - 1) = 2.0610.
  test("is log-normal about its median", () => {
    const range = pointRange(9.8, 0, 0.2);
    expect(range.p10Mm).toBeCloseTo(7.5389, 3);
    expect(range.p90Mm).toBeCloseTo(12.7217, 3);
    expect(range.meanMm).toBeCloseTo(10.002, 3);
    expect(range.standardErrorMm).toBeCloseTo(2.061, 3);
    expect(range.logSpread).toBeCloseTo(0.2, 10);
  });

  // Check value k-lognormal: the coefficient of variation is sqrt(exp(s²) - 1); at s = 0.5 it is 0.53294.
  test("has the coefficient of variation of a log-normal", () => {
    const { standardErrorMm, meanMm } = pointRange(99.8, 0, 0.5);
    expect(standardErrorMm / (meanMm + 0.2)).toBeCloseTo(0.53294, 4);
  });

  test("lies higher where truths are usually above the estimate", () => {
    expect(pointRange(9.8, Math.log(1.1), 0.2).p10Mm).toBeCloseTo(7.7389 * 1.1 - 0.2, 3);
  });

  test("that is dry may be wet after all, never below 0; one without a depth has no range", () => {
    const dry = pointRange(0, 0, 0.8);
    expect(dry.p10Mm).toBe(0);
    expect(dry.p90Mm).toBeCloseTo(0.2 * Math.exp(1.28155 * 0.8) - 0.2, 4);
    expect(pointRange(Number.NaN, 0, 0.2).p90Mm).toBeNaN();
    expect(pointRange(5, 0, Number.NaN).p90Mm).toBeNaN();
  });
});

describe("an area", () => {
  const cells = (count: number, apartKm: number) => ({
    xKm: Array.from({ length: count }, (_, k) => (k % 30) * apartKm),
    yKm: Array.from({ length: count }, (_, k) => Math.floor(k / 30) * apartKm),
    depthMm: new Array<number>(count).fill(9.8),
    logSpread: new Array<number>(count).fill(0.2),
    fraction: new Array<number>(count).fill(1),
  });

  test("of one cell is its point", () => {
    const area = areaRange(cells(1, 1), MODEL);
    const point = pointRange(9.8, MODEL.medianLogError, 0.2);
    expect(area.p10Mm).toBeCloseTo(point.p10Mm, 9);
    expect(area.p90Mm).toBeCloseTo(point.p90Mm, 9);
  });

  test("of cells in one place is as unsure as each of them", () => {
    expect(areaRange(cells(9, 0), MODEL).standardErrorMm).toBeCloseTo(
      pointRange(9.8, 0, 0.2).standardErrorMm,
      9,
    );
  });

  // By hand: two cells 10 km apart at a range of 10 km have a correlation of 0.05 + 0.95 exp(-1) = 0.39949; each has
  // a variance of m² (exp(0.04) - 1), both together m² (exp(0.04 × 0.39949) - 1), with m = 10 exp(0.02).
  test("of two cells apart has the variance worked out by hand", () => {
    const m = 10 * Math.exp(0.02);
    const one = m ** 2 * (Math.exp(0.04) - 1);
    const both = m ** 2 * (Math.exp(0.04 * 0.3994855) - 1);
    expect(areaRange(cells(2, 10), MODEL).standardErrorMm).toBeCloseTo(Math.sqrt((one + both) / 2), 6);
  });

  test("of cells far apart keeps what all have in common, and is never as sure as strangers", () => {
    const far = areaRange(cells(100, 1000), MODEL).standardErrorMm;
    const alone = pointRange(9.8, 0, 0.2).standardErrorMm;
    expect(far).toBeLessThan(0.3 * alone);
    expect(far).toBeGreaterThan(0.2 * alone);
    const gauges = areaRange(cells(100, 1000), { ...MODEL, gaugesSpread: 0.15 }).standardErrorMm;
    expect(gauges).toBeGreaterThan(0.7 * alone);
  });

  test("of many cells, sampled, is that of all pairs within 3 %", () => {
    const all = cells(900, 1);
    let covariance = 0;
    for (let i = 0; i < 900; i++)
      for (let j = 0; j < 900; j++) {
        const distance = Math.hypot(all.xKm[i] - all.xKm[j], all.yKm[i] - all.yKm[j]);
        covariance += Math.expm1(0.04 * (0.05 + 0.95 * Math.exp(-distance / 10)));
      }
    const exact = 10 * Math.exp(0.02) * Math.sqrt(covariance / 900 ** 2);
    const ratio = areaRange(all, MODEL).standardErrorMm / exact;
    expect(ratio).toBeGreaterThan(0.97);
    expect(ratio).toBeLessThan(1.03);
  });

  test("leaves out cells without a depth, and has no range without any", () => {
    const some = { ...cells(2, 10), depthMm: [9.8, Number.NaN] };
    expect(areaRange(some, MODEL).p10Mm).toBeCloseTo(areaRange(cells(1, 1), MODEL).p10Mm, 9);
    expect(areaRange({ ...some, depthMm: [Number.NaN, Number.NaN] }, MODEL).p10Mm).toBeNaN();
  });
});

test("a part of the window has its depth's share, and a wider range for its size", () => {
  const time = { lastingShare: 0.5, hours: 1, windowHours: 6 };
  const window = pointRange(59.8, 0, 0.2);
  const hour = intervalRange(window, 59.8, 9.8, time, 1);
  // Variance of the mean over 1 h: 0.5 + 0.5 × 0.735759 = 0.86788; over 6 h: 0.5 + 0.5 × 2 (6 - 1 + exp(-6)) / 36 = 0.63896.
  expect(hour.logSpread).toBeCloseTo(0.2 * Math.sqrt(0.86788 / 0.63896), 4);
  // The mean stays in proportion, whatever the spread: 10 exp(0.02) - 0.2.
  expect(hour.meanMm).toBeCloseTo(10.002, 3);
  const whole = intervalRange(window, 59.8, 59.8, time, 6);
  expect(whole.p10Mm).toBeCloseTo(window.p10Mm, 9);
  expect(intervalRange(window, 59.8, Number.NaN, time, 1).p10Mm).toBeNaN();
});
