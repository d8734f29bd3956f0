import { type GaugeSeries, QUALITY_DOUBT, QUALITY_DROP, QUALITY_USE } from "@rainreckon/core";
import { checkValue } from "@rainreckon/test-data/published";
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { gaugeDepth, gaugeSteps } from "./gauge-steps.ts";

const MINUTE = 60_000;
const START = Date.UTC(2031, 4, 3, 11);

type Reading = readonly [fromMinute: number, toMinute: number, depthMm: number, quality?: number];

function series(readings: readonly Reading[]): GaugeSeries {
  return {
    network: "moor",
    id: "007",
    startEpochMs: Float64Array.from(readings, ([from]) => START + from * MINUTE),
    endEpochMs: Float64Array.from(readings, ([, to]) => START + to * MINUTE),
    depthMm: Float64Array.from(readings, ([, , depth]) => depth),
    quality: Uint8Array.from(readings, ([, , , quality]) => quality ?? QUALITY_USE),
  };
}

describe("borders", () => {
  // House rule of the design, and check value h-interval-ending: (11:00, 12:00] holds the reading
  // stamped 12:00; the one stamped 11:00 belongs to the hour before.
  test("a reading stamped on a border belongs to the step that ends there", () => {
    const steps = gaugeSteps(
      series([
        [-5, 0, 9],
        [0, 5, 1],
        [55, 60, 2],
        [60, 65, 4],
      ]),
      START,
      60 * MINUTE,
      2,
    );
    expect([...steps.depthMm]).toEqual([3, 4]);
    expect(steps.splitMm).toBe(0);
  });

  test("a tip of a millisecond stamped on a border belongs to the step that ends there", () => {
    const dry = series([[0, 60, 0]]);
    const tip: GaugeSeries = {
      ...dry,
      startEpochMs: Float64Array.of(START, START + 5 * MINUTE - 1, START + 5 * MINUTE),
      endEpochMs: Float64Array.of(START + 5 * MINUTE - 1, START + 5 * MINUTE, START + 60 * MINUTE),
      depthMm: Float64Array.of(0, 0.2, 0),
      quality: new Uint8Array(3),
    };
    const steps = gaugeSteps(tip, START, 5 * MINUTE, 12);
    expect(steps.depthMm[0]).toBe(0.2);
    expect(steps.depthMm[1]).toBe(0);
    expect([...steps.observedFraction]).toEqual(new Array(12).fill(1));
    expect(steps.splitMm).toBe(0);
  });

  test("a reading without length counts in the step that it ends, where that step was observed", () => {
    const steps = gaugeSteps(
      series([
        [0, 5, 0],
        [5, 5, 0.2],
        [5, 10, 0],
      ]),
      START,
      5 * MINUTE,
      2,
    );
    expect([...steps.depthMm]).toEqual([0.2, 0]);
  });

  test("a reading across a border is shared out by time and counted", () => {
    // By hand: 6 mm over (50, 70] is half before and half after minute 60.
    const steps = gaugeSteps(
      series([
        [0, 50, 1],
        [50, 70, 6],
        [70, 120, 0],
      ]),
      START,
      60 * MINUTE,
      2,
    );
    expect([...steps.depthMm]).toEqual([4, 3]);
    expect(steps.splitMm).toBe(6);
  });

  test("of a reading across the end of the window only the part inside counts", () => {
    const steps = gaugeSteps(series([[-30, 30, 6]]), START, 60 * MINUTE, 1);
    expect(steps.depthMm[0]).toBe(3);
    expect(steps.observedFraction[0]).toBe(0.5);
    expect(steps.splitMm).toBe(3);
  });
});

describe("what was not observed", () => {
  test("a gap leaves the step NaN, never 0", () => {
    const steps = gaugeSteps(
      series([
        [0, 5, 1],
        [10, 15, 0],
      ]),
      START,
      5 * MINUTE,
      4,
    );
    expect([...steps.depthMm]).toEqual([1, Number.NaN, 0, Number.NaN]);
    expect([...steps.observedFraction]).toEqual([1, 0, 1, 0]);
  });

  test("one missing value of six leaves the sum of the others with its coverage", () => {
    const { inputs, expected } = checkValue("h-no-sum-incomplete");
    const readings = (inputs.values as (number | null)[]).map(
      (value, i): Reading => [i * 10, i * 10 + 10, value ?? Number.NaN],
    );
    const depth = gaugeDepth(series(readings), { startEpochMs: START, endEpochMs: START + 60 * MINUTE });
    const { sum_of_available, coverage } = expected as { sum_of_available: number; coverage: number };
    expect(depth.depthMm).toBeCloseTo(sum_of_available, 9);
    expect(depth.observedFraction).toBeCloseTo(coverage, 9);
  });

  test("dropped, missing and impossible readings are not observed and are counted by cause", () => {
    const steps = gaugeSteps(
      series([
        [0, 5, 9, QUALITY_DROP],
        [5, 10, Number.NaN],
        [10, 15, -1],
        [15, 20, Number.POSITIVE_INFINITY],
      ]),
      START,
      5 * MINUTE,
      4,
    );
    expect([...steps.observedFraction]).toEqual([0, 0, 0, 0]);
    expect(steps.unusable).toEqual({ missing: 1, dropped: 1, impossible: 2 });
  });

  test("a doubted reading is kept and flagged, or left out, as asked", () => {
    const doubted = series([
      [0, 5, 2, QUALITY_DOUBT],
      [5, 10, 1],
    ]);
    const kept = gaugeSteps(doubted, START, 10 * MINUTE, 1, "keep");
    expect([kept.depthMm[0], kept.observedFraction[0], kept.doubtedFraction[0]]).toEqual([3, 1, 0.5]);
    const dropped = gaugeSteps(doubted, START, 10 * MINUTE, 1, "drop");
    expect([dropped.depthMm[0], dropped.observedFraction[0], dropped.doubtedFraction[0]]).toEqual([
      1, 0.5, 0,
    ]);
  });

  test("time that two readings claim counts once", () => {
    const steps = gaugeSteps(
      series([
        [0, 6, 1],
        [4, 10, 1],
      ]),
      START,
      10 * MINUTE,
      1,
    );
    expect(steps.observedFraction[0]).toBe(1);
    expect(steps.overlapMs).toBe(2 * MINUTE);
  });
});

test("however a window is cut, the steps add up to the same depth and observed time", () => {
  const readings = fc.array(
    fc.tuple(
      fc.integer({ min: 0, max: 9 }),
      fc.integer({ min: 1, max: 20 }),
      fc.double({ min: 0, max: 30, noNaN: true }),
    ),
    { maxLength: 20 },
  );
  fc.assert(
    fc.property(readings, fc.constantFrom(1, 2, 5, 7, 60), (parts, stepMinutes) => {
      let minute = -10;
      const laid = parts.map(([gap, length, depth]): Reading => {
        const from = minute + gap;
        minute = from + length;
        return [from, minute, depth];
      });
      const count = 420 / stepMinutes;
      const steps = gaugeSteps(series(laid), START, stepMinutes * MINUTE, count);
      const whole = gaugeDepth(series(laid), { startEpochMs: START, endEpochMs: START + 420 * MINUTE });
      const sum = steps.depthMm.reduce((total, depth) => total + (Number.isNaN(depth) ? 0 : depth), 0);
      const share = steps.observedFraction.reduce((total, fraction) => total + fraction, 0) / count;
      expect(sum).toBeCloseTo(Number.isNaN(whole.depthMm) ? 0 : whole.depthMm, 9);
      expect(share).toBeCloseTo(whole.observedFraction, 12);
    }),
    { seed: 7, numRuns: 200 },
  );
});

test("a step or a count that is not positive is a caller's mistake", () => {
  expect(() => gaugeSteps(series([]), START, 0, 1)).toThrow(RangeError);
  expect(() => gaugeSteps(series([]), START, MINUTE, 0)).toThrow(RangeError);
});
