import type { Pair } from "@rainreckon/core";
import { checkValue } from "@rainreckon/test-data/published";
import { scorePairs } from "@rainreckon/verification";
import { describe, expect, test } from "vitest";
import { crossValidate } from "./cross-validation.ts";
import { applyFactor, factorFromSums, meanFieldBias } from "./mean-field-bias.ts";

const HOUR = 3_600_000;

function pair(gaugeId: string, gaugeMm: number, radarMm: number, changes: Partial<Pair> = {}): Pair {
  return {
    network: "moor",
    gaugeId,
    startEpochMs: 0,
    endEpochMs: HOUR,
    gaugeMm,
    radarMm,
    radarId: "sabird",
    gaugeObservedFraction: 1,
    radarObservedFraction: 1,
    commonFraction: 1,
    rangeKm: 42,
    beamHeightAslM: 900,
    used: true,
    reason: "",
    ...changes,
  };
}

const options = { minGauges: 5, minGaugeSumMm: 10, factorLimits: [0.1, 10] as const };
const five = [pair("a", 4, 2), pair("b", 6, 3), pair("c", 8, 4), pair("d", 10, 5), pair("e", 2, 1)];

describe("the factor", () => {
  test("is the ratio of sums gauge/radar over used pairs", () => {
    const bias = meanFieldBias(
      [...five, pair("x", 99, 1, { used: false, reason: "doubted: silent gauge" })],
      options,
    );
    expect(bias).toMatchObject({ applied: true, factor: 2, clipped: false, gaugeCount: 5, pairCount: 5 });
    expect(bias).toMatchObject({ gaugeSumMm: 30, radarSumMm: 15 });
  });

  // Check value b-ratio-se: standard errors of a ratio of sums, here with the roles of the two sides
  // exchanged so that the factor gauge/radar is the book's ratio.
  test("carries its standard errors", () => {
    const table = checkValue("a-pairs24-table").expected as { gauge_mm: number[]; radar_mm: number[] };
    const expected = checkValue("b-ratio-se").expected as Record<string, number>;
    const pairs = table.gauge_mm.map((depth, i) => pair(`g${i}`, table.radar_mm[i], depth));
    const bias = meanFieldBias(pairs, options);
    if (!bias.applied) throw new Error(bias.reason);
    expect(bias.factor).toBeCloseTo(expected.ratio, 9);
    expect(bias.standardErrorLinearised).toBeCloseTo(expected.se_linearised, 9);
    expect(bias.standardErrorJackknife).toBeCloseTo(expected.se_jackknife, 9);
  });

  test("counts the hours of one gauge as one gauge, in the factor's error too", () => {
    const halves = five.flatMap((whole) => [
      { ...whole, gaugeMm: whole.gaugeMm / 2, radarMm: whole.radarMm / 4 },
      {
        ...whole,
        startEpochMs: HOUR,
        endEpochMs: 2 * HOUR,
        gaugeMm: whole.gaugeMm / 2,
        radarMm: (3 * whole.radarMm) / 4,
      },
    ]);
    const bias = meanFieldBias(halves, options);
    expect(bias).toMatchObject({ factor: 2, gaugeCount: 5, pairCount: 10, standardErrorLinearised: 0 });
  });

  test("is clipped at the limits, and says so", () => {
    const wet = five.map((each) => ({ ...each, radarMm: each.radarMm / 64 }));
    expect(meanFieldBias(wet, options)).toMatchObject({
      factor: 10,
      unlimitedFactor: 128,
      clipped: true,
      factorDb: 10,
    });
    const dry = five.map((each) => ({ ...each, radarMm: each.radarMm * 100 }));
    expect(meanFieldBias(dry, options)).toMatchObject({ factor: 0.1, unlimitedFactor: 0.02, clipped: true });
  });

  test("limits that are not positive or out of order are a caller's mistake", () => {
    expect(() => factorFromSums(1, 1, [0, 10])).toThrow(RangeError);
    expect(() => factorFromSums(1, 1, [2, 1])).toThrow(RangeError);
  });
});

describe("no adjustment", () => {
  test.each([
    ["4 trusted gauges with usable pairs, 5 needed", five.slice(1)],
    [
      "9.9 mm summed over the gauges, 10 mm needed",
      five.map((each) => ({ ...each, gaugeMm: (each.gaugeMm * 9.9) / 30 })),
    ],
    [
      "the radar saw no rain at the gauges: nothing to multiply",
      five.map((each) => ({ ...each, radarMm: 0 })),
    ],
    ["0 trusted gauges with usable pairs, 5 needed", []],
  ])("%s", (reason, pairs) => {
    expect(meanFieldBias(pairs, options)).toMatchObject({ applied: false, reason });
  });

  test("exactly the floors are enough, though sums of tips are not exact", () => {
    const tips = five.map((each) => ({ ...each, gaugeMm: 0.1 * 20 }));
    expect(meanFieldBias(tips, options).applied).toBe(true);
    const hundredTenths = ["a", "b", "c", "d", "e"].flatMap((id) =>
      [...new Array(20).keys()].map((hour) =>
        pair(id, 0.1, 0.1, { startEpochMs: hour * HOUR, endEpochMs: (hour + 1) * HOUR }),
      ),
    );
    expect(meanFieldBias(hundredTenths, options).applied).toBe(true);
  });
});

describe("cross-validation", () => {
  // By hand: gauges 2, 4, 12 against radar 1, 4, 4. Factors of the others: 16/8, 14/5, 6/5.
  const three = [pair("a", 2, 1), pair("b", 4, 4), pair("c", 12, 4)];
  const held = crossValidate(three, options);

  test("judges each gauge by the factor of the others alone", () => {
    expect(held.gauges.map((gauge) => gauge.factor)).toEqual([2, 2.8, 1.2]);
    const errors = [2 - 2, 11.2 - 4, 4.8 - 12];
    const errorMm = Math.sqrt(errors.reduce((sum, error) => sum + error ** 2, 0) / 3);
    expect(held.errorMm).toBeCloseTo(errorMm, 12);
    expect(held.errorPercent).toBeCloseTo((100 * errorMm) / 6, 12);
    expect(held.errorBeforeMm).toBeCloseTo(Math.sqrt((1 + 0 + 64) / 3), 12);
  });

  test("a gauge's own readings never change its own figure", () => {
    const other = crossValidate([pair("a", 1000, 1), ...three.slice(1)], options);
    expect(other.gauges[0].crossValidatedMm).toBe(held.gauges[0].crossValidatedMm);
    expect(other.gauges[1].crossValidatedMm).not.toBe(held.gauges[1].crossValidatedMm);
  });

  test("gives pairs to score, with the gauge depths as they were", () => {
    expect(held.pairs.map((each) => [each.gaugeMm, each.radarMm])).toEqual([
      [2, 2],
      [4, 11.2],
      [12, 4.8],
    ]);
    const scores = scorePairs(held.pairs, {
      thresholdMm: 0.2,
      thresholdsMm: [1],
      rangeBandsKm: [50],
      pairIntervalMs: HOUR,
      bootstrap: { seed: 1, samples: 100, level: 0.9, blockMinutes: 60 },
    });
    const biasRatio = scores.whole.continuous.find((score) => score.name === "biasRatio");
    expect(biasRatio?.value).toBeCloseTo(18 / 18, 12);
  });

  test("gauges that share one factor are predicted exactly", () => {
    const exact = crossValidate(five, options);
    expect(exact.errorMm).toBeCloseTo(0, 12);
    expect(exact.errorBeforeMm).toBeGreaterThan(1);
  });

  test("factors of the others meet the same limits, and are counted", () => {
    const wet = three.map((each) => ({ ...each, radarMm: each.radarMm / 100 }));
    const limited = crossValidate(wet, options);
    expect(limited.gauges.map((gauge) => gauge.factor)).toEqual([10, 10, 10]);
    expect(limited.clippedCount).toBe(3);
  });

  test("where the others saw no radar rain there is no figure, with the reason", () => {
    const lone = crossValidate([pair("a", 3, 2), pair("b", 1, 0), pair("c", 0, 0)], options);
    expect(lone.gauges[0].crossValidatedMm).toBeNaN();
    expect(lone.pairs[0]).toMatchObject({
      used: false,
      reason: "the radar saw no rain at the other gauges: no factor",
    });
    expect(lone.gaugeCount).toBe(2);
  });

  test("unused pairs pass through untouched, and none at all gives NaN", () => {
    const unused = pair("x", 1, 1, { used: false, reason: "no gauge data" });
    expect(crossValidate([...three, unused], options).pairs[3]).toBe(unused);
    const none = crossValidate([unused], options);
    expect([none.errorMm, none.errorPercent, none.gaugeCount]).toEqual([Number.NaN, Number.NaN, 0]);
  });
});

describe("the adjusted field", () => {
  test("is every depth times the factor: NaN stays NaN, 0 stays 0, the field handed in stays as it was", () => {
    const field = Float32Array.of(0, 1.5, Number.NaN, 4);
    expect([...applyFactor(field, 2)]).toEqual([0, 3, Number.NaN, 8]);
    expect([...field]).toEqual([0, 1.5, Number.NaN, 4]);
  });

  test("adds up in time: the sum of adjusted depths is the adjusted total", () => {
    const hoursMm = [Float32Array.of(1, 2), Float32Array.of(3, 0.5)];
    const total = Float32Array.of(4, 2.5);
    const adjusted = hoursMm.map((field) => applyFactor(field, 1.25));
    expect([...applyFactor(total, 1.25)]).toEqual([
      adjusted[0][0] + adjusted[1][0],
      adjusted[0][1] + adjusted[1][1],
    ]);
  });

  test("a factor that is not finite and above 0 is a caller's mistake", () => {
    for (const factor of [0, -1, Number.NaN, Number.POSITIVE_INFINITY]) {
      expect(() => applyFactor(new Float32Array(1), factor)).toThrow(RangeError);
    }
  });
});
