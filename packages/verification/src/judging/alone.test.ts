import type { GaugeSeries } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { inventedStorm, LEAD_STEPS } from "../../test/invented-storm.ts";
import { quantumMm } from "./aligned.ts";
import { findLateRelease, findOddResolution, findRepeatedValue, findTestTips } from "./alone.ts";
import { judgeGauges } from "./judge.ts";

const STEP = 300_000;

function series(depthMm: readonly number[]): GaugeSeries {
  return {
    network: "moor",
    id: "g",
    stepMs: STEP,
    startEpochMs: Float64Array.from(depthMm, (_, k) => k * STEP),
    endEpochMs: Float64Array.from(depthMm, (_, k) => (k + 1) * STEP),
    depthMm: Float64Array.from(depthMm),
    quality: new Uint8Array(depthMm.length),
  };
}

const day = (rain: (k: number) => number) => series(Array.from({ length: 288 }, (_, k) => rain(k)));
const WINDOW = { startEpochMs: 0, endEpochMs: 288 * STEP };
const DRY = () => true;
const WET = () => false;

describe("a repeated value", () => {
  const steady = day((k) => (k >= 100 && k < 110 ? 1.4 : k % 7 === 0 ? 0.2 : 0));

  test("is told where the radar saw nothing of the kind", () => {
    expect(findRepeatedValue(steady, WINDOW, 0.2, () => 1)).toMatchObject({ count: 10, eachMm: 1.4 });
  });

  test("is none where the radar saw as much, nor where nothing is known of the radar", () => {
    expect(findRepeatedValue(steady, WINDOW, 0.2, () => 12)).toBeUndefined();
    expect(findRepeatedValue(steady, WINDOW, 0.2, () => Number.NaN)).toBeUndefined();
  });

  test("of one or two tips is drizzle", () => {
    const drizzle = day((k) => (k >= 100 && k < 130 ? 0.4 : 0));
    expect(findRepeatedValue(drizzle, WINDOW, 0.2, () => 0)).toBeUndefined();
  });
});

describe("tips on a dry day", () => {
  const jug = day((k) => (k === 120 ? 2 : k === 121 ? 1.2 : 0));

  test("are told where it was dry", () => {
    const found = findTestTips(jug, WINDOW, 0.2, DRY);
    expect(found).toMatchObject({ startEpochMs: 120 * STEP, endEpochMs: 122 * STEP, count: 2 });
    expect(found?.depthMm).toBeCloseTo(3.2, 9);
  });

  test("are rain where anybody else had rain, and too few are nothing", () => {
    expect(findTestTips(jug, WINDOW, 0.2, WET)).toBeUndefined();
    expect(
      findTestTips(
        day((k) => (k === 120 ? 0.8 : 0)),
        WINDOW,
        0.2,
        DRY,
      ),
    ).toBeUndefined();
  });
});

test("a drip of single tips after the rain is a late release; the rain itself is none", () => {
  const drips = day((k) => (k < 40 ? 1 : k < 100 && k % 6 === 0 ? 0.2 : 0));
  expect(findLateRelease(drips, WINDOW, 0.2, ({ startEpochMs }) => startEpochMs >= 45 * STEP)).toMatchObject({
    count: 9,
    startEpochMs: 48 * STEP,
  });
  expect(findLateRelease(drips, WINDOW, 0.2, WET)).toBeUndefined();
});

test("values that are no multiples of the tip are counted, with what they are multiples of", () => {
  const halves = day((k) => (k % 3 === 0 ? 0.25 * ((k % 5) + 1) : 0));
  expect(findOddResolution(halves, WINDOW, 0.2)).toMatchObject({ count: 96, quantumMm: 0.25 });
  expect(
    findOddResolution(
      day((k) => 0.2 * (k % 4)),
      WINDOW,
      0.2,
    ),
  ).toBeUndefined();
});

describe("what all readings are multiples of", () => {
  test.each([
    ["tips of 0.2 mm written with one decimal", [0.2, 0.4, 0, 1.2, 0.8, 3], 0.2],
    ["tips of 0.2 mm as inches, rounded to four decimals", [0.0079, 0.0157, 0.0394, 0.0079, 0.0787], 0.0079],
    ["no single tip among them", [0.4, 0.6, 1, 1.4], 0.2],
  ])("%s", (_words, depths, quantum) => {
    expect(quantumMm(depths)).toBeCloseTo(quantum, 6);
  });

  test("is not known of three readings, or of readings without a quantum", () => {
    expect(quantumMm([0.2, 0.4, 0.6])).toBeUndefined();
    expect(quantumMm([0.7513, 0.3297, 0.9151, 0.2718, 0.5713, 1.1171])).toBeUndefined();
  });
});

describe("among the gauges of a run", () => {
  /** Rain in the first two hours only, and what gauge 4 does in the dry rest. */
  const storm = (rest: (step: number) => number, more: Parameters<typeof inventedStorm>[0] | object = {}) => {
    const { gauges, context } = inventedStorm({
      seed: 11,
      hours: 10,
      gauges: 10,
      field: false,
      blind: (_, mm) => mm.fill(0, 24),
      spoil: (g, mm) => {
        for (let k = LEAD_STEPS + 24; k < mm.length; k++) mm[k] = g === 4 ? rest(k - LEAD_STEPS) : 0;
      },
      ...more,
    });
    return judgeGauges(gauges, context)[4];
  };

  test("a test with a jug is used with care, and told", () => {
    expect(storm((step) => (step === 80 ? 2.4 : 0))).toMatchObject({
      verdict: "use with care",
      cause: { name: "test-tips" },
      trusted: true,
    });
  });

  test("drips after the rain: late release; in snow, possible melt, unless the gauge is heated", () => {
    const drips = (step: number) => (step >= 40 && step < 90 && step % 7 === 0 ? 0.2 : 0);
    expect(storm(drips).cause?.name).toBe("late-release");
    const snow = { sight: () => ({ snowFraction: 0.8 }) };
    const melting = storm(drips, snow);
    expect(melting.cause?.name).toBe("melt");
    expect(melting.evidence).toContain("melt is possible (no temperature is known)");
  });
});
