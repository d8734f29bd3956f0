import type { Pair } from "@rainreckon/core";
import { checkValue } from "@rainreckon/test-data/published";
import { describe, expect, test } from "vitest";
import { factorFromSums, meanFieldBias } from "./mean-field-bias.ts";

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
