import type { Pair } from "@rainreckon/core";
import { checkValue, inputNumbers } from "@rainreckon/test-data/published";
import { describe, expect, test } from "vitest";
import { doubleMassBreak, massBreak } from "./ratio-in-time.ts";

const HOUR = 3_600_000;

function pairs(depths: readonly number[]): Pair[] {
  return depths.map((gaugeMm, k) => ({
    startEpochMs: k * HOUR,
    endEpochMs: (k + 1) * HOUR,
    network: "moor",
    gaugeId: "g",
    gaugeMm,
    radarMm: gaugeMm,
    radarId: "r",
    gaugeObservedFraction: 1,
    radarObservedFraction: 1,
    commonFraction: 1,
    rangeKm: 10,
    beamHeightAslM: 500,
    used: true,
    reason: "",
  }));
}

// The two-sample t test of scipy, entry h-double-mass-test.
test("the t statistic of a break is that of a two-sample test of the ratios", () => {
  const entry = checkValue("h-double-mass-test");
  const expected = entry.expected as { t: number; mean_before: number; mean_after: number };
  const { t, meanBefore, meanAfter } = massBreak(inputNumbers(entry, "A"), inputNumbers(entry, "B"), 5);
  expect(t).toBeCloseTo(expected.t, 7);
  expect(meanBefore).toBeCloseTo(expected.mean_before, 10);
  expect(meanAfter).toBeCloseTo(expected.mean_after, 10);
});

describe("a break of the double-mass curve", () => {
  const rain = Array.from({ length: 30 }, (_, k) => 2 + 3 * Math.sin(k) ** 2);
  const scatter = rain.map((_, k) => 1 + 0.05 * Math.sin(7 * k));
  const others = [0.9, 1, 1.1, 1].map((factor) => pairs(rain.map((mm) => factor * mm)));

  test("is found at its hour with its factor: from the 16th on half of the water", () => {
    const own = pairs(rain.map((mm, k) => mm * scatter[k] * (k < 16 ? 1 : 0.5)));
    const found = doubleMassBreak(own, others);
    expect(found?.factor).toBeCloseTo(0.5, 1);
    expect(found?.breakEpochMs).toBe(16 * HOUR);
  });

  test("is not found where there is scatter only", () => {
    expect(doubleMassBreak(pairs(rain.map((mm, k) => mm * scatter[k])), others)).toBeUndefined();
  });

  test("is not looked for beside fewer than three gauges, or over few hours", () => {
    const own = pairs(rain.map((mm, k) => mm * (k < 16 ? 1 : 0.5)));
    expect(doubleMassBreak(own, others.slice(0, 2))).toBeUndefined();
    expect(
      doubleMassBreak(
        own.slice(8, 22),
        others.map((of) => of.slice(8, 22)),
      ),
    ).toBeUndefined();
  });
});
