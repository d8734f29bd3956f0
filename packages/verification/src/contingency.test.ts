import { checkValue, inputNumber } from "@rainreckon/test-data/published";
import fc from "fast-check";
import { expect, test } from "vitest";
import { contingencyCounts, contingencyScores, contingencyWilson, wilsonInterval } from "./contingency.ts";
import { normalProbability, normalQuantile } from "./normal.ts";

const table = (hits: number, falseAlarms: number, misses: number, correctNegatives: number) => ({
  hits,
  falseAlarms,
  misses,
  correctNegatives,
});

// Limits of EDI and SEDI, check value b-edge-edi-limits: 0 < H, F < 1; H = 1 is fine for EDI alone.
test.each([
  [
    "F = 0",
    table(3, 0, 1, 6),
    Number.NaN,
    Number.NaN,
    "there was no false alarm: the logarithm has no value",
  ],
  ["H = 1", table(3, 2, 0, 6), 1, Number.NaN, "every event was detected: the logarithm has no value"],
  ["H = 0", table(0, 2, 3, 6), Number.NaN, Number.NaN, "no event was detected: the logarithm has no value"],
  ["H = F", table(2, 2, 4, 4), 0, 0, undefined],
])("EDI and SEDI at %s", (_limit, counts, edi, sedi, reason) => {
  const scores = contingencyScores(counts);
  // Adding 0 makes 0 of -0.
  expect(scores.extremalDependencyIndex.value + 0).toEqual(edi);
  expect(scores.symmetricExtremalDependencyIndex.value + 0).toEqual(sedi);
  expect(scores.symmetricExtremalDependencyIndex.reason).toBe(reason);
});

test("every undefined score says why, every defined one says nothing", () => {
  const count = fc.integer({ min: 0, max: 3 });
  fc.assert(
    fc.property(count, count, count, count, (a, b, c, d) => {
      for (const { value, reason } of Object.values(contingencyScores(table(a, b, c, d)))) {
        expect(Number.isNaN(value)).toBe(reason !== undefined);
      }
    }),
    { seed: 5, numRuns: 256 },
  );
});

test("HSS = 2 ETS / (1 + ETS) and 1/CSI = 1/POD + 1/(1 - FAR) - 1 (algebra of the definitions)", () => {
  const count = fc.integer({ min: 1, max: 3000 });
  fc.assert(
    fc.property(count, count, count, count, (a, b, c, d) => {
      const scores = contingencyScores(table(a, b, c, d));
      const ets = scores.equitableThreatScore.value;
      expect(scores.heidkeSkillScore.value).toBeCloseTo((2 * ets) / (1 + ets), 9);
      const { value: pod } = scores.probabilityOfDetection;
      const { value: far } = scores.falseAlarmRatio;
      expect(1 / scores.criticalSuccessIndex.value).toBeCloseTo(1 / pod + 1 / (1 - far) - 1, 6);
    }),
    { seed: 5, numRuns: 200 },
  );
});

test("FAR and POFD are told apart: of the radar's events, of the gauges' non-events", () => {
  const scores = contingencyScores(table(1, 3, 0, 6));
  expect(scores.falseAlarmRatio.value).toBe(3 / 4);
  expect(scores.probabilityOfFalseDetection.value).toBe(3 / 9);
});

test("an event is at or above the threshold on both sides, within the slack of tips", () => {
  const gaugeMm = Float64Array.of(0.6, 0.2 * 3, 0.5, 0);
  const radarMm = Float64Array.of(0.6, 0.4, 0.7, 0.1);
  expect(contingencyCounts({ gaugeMm, radarMm }, 0.6)).toEqual(table(1, 1, 1, 1));
});

test("the normal quantile is that of R's qnorm(0.975), and inverts the distribution", () => {
  const z = inputNumber(checkValue("b-wilson-81-263"), "z");
  expect(normalQuantile(0.975)).toBeCloseTo(z, 13);
  for (const p of [0.001, 0.05, 0.5, 0.95, 0.999999]) {
    expect(normalProbability(normalQuantile(p))).toBeCloseTo(p, 14);
  }
  expect([normalProbability(-40), normalProbability(40)]).toEqual([0, 1]);
  expect(() => normalQuantile(1)).toThrow(RangeError);
});

test("a Wilson interval holds its share and stays within 0 and 1", () => {
  fc.assert(
    fc.property(fc.integer({ min: 1, max: 500 }), fc.double({ min: 0, max: 1, noNaN: true }), (of, share) => {
      const count = Math.round(of * share);
      const { low, high } = wilsonInterval(count, of, 0.9);
      expect(low).toBeGreaterThanOrEqual(0);
      expect(high).toBeLessThanOrEqual(1);
      expect(low).toBeLessThanOrEqual(count / of);
      expect(high).toBeGreaterThanOrEqual(count / of);
    }),
    { seed: 5, numRuns: 200 },
  );
});

test("a share of nothing has no interval, with the reason", () => {
  expect(contingencyWilson(table(0, 4, 0, 6), 0.9).probabilityOfDetection).toEqual({
    low: Number.NaN,
    high: Number.NaN,
    level: 0.9,
    reason: "nothing to take a share of",
  });
});

test("counts below 0 are a caller's mistake", () => {
  expect(() => contingencyScores(table(-1, 0, 0, 0))).toThrow(RangeError);
});
