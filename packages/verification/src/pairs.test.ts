import { cutWindow } from "@rainreckon/accumulation";
import type { GaugeSeries } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { leaveOut, makePairs, type PairInput, type RadarSteps } from "./pairs.ts";

const MINUTE = 60_000;
const HOUR = 60 * MINUTE;
const START = Date.UTC(2031, 4, 3, 12);

/** A gauge reading every `stepMinutes` from `offsetMinutes` on; undefined is a missing reading. */
function gauge(stepMinutes: number, depths: readonly (number | undefined)[], offsetMinutes = 0): GaugeSeries {
  const start = START + offsetMinutes * MINUTE;
  const startEpochMs = Float64Array.from(depths, (_, i) => start + i * stepMinutes * MINUTE);
  return {
    network: "moor",
    id: "007",
    stepMs: stepMinutes * MINUTE,
    startEpochMs,
    endEpochMs: startEpochMs.map((ms) => ms + stepMinutes * MINUTE),
    depthMm: Float64Array.from(depths, (depth) => depth ?? Number.NaN),
    quality: new Uint8Array(depths.length),
  };
}

/** Radar steps of five minutes; undefined was not observed. */
function radar(depths: readonly (number | undefined)[]): RadarSteps {
  return {
    startEpochMs: START,
    stepMs: 5 * MINUTE,
    depthMm: Float64Array.from(depths, (depth) => depth ?? Number.NaN),
    observedFraction: Float64Array.from(depths, (depth) => (depth === undefined ? 0 : 1)),
  };
}

const same = (count: number, depth: number | undefined) => new Array<number | undefined>(count).fill(depth);

function input(series: GaugeSeries, steps: RadarSteps, hours = 1): PairInput {
  return {
    series,
    radar: steps,
    intervals: cutWindow({ startEpochMs: START, endEpochMs: START + hours * HOUR }, HOUR),
    minCommonFraction: 0.5,
    radarId: "sabird",
    rangeKm: 42,
    beamHeightAslM: 900,
  };
}

describe("a gauge as fine as the base step", () => {
  test("both sides are summed over the steps that both observed", () => {
    // By hand: the gauge lacks step 0, the radar steps 10 and 11; nine steps are common.
    const gaugeDepths = [undefined, ...same(11, 0.2)];
    const radarDepths = [...same(10, 0.3), undefined, undefined];
    const [pair] = makePairs(input(gauge(5, gaugeDepths), radar(radarDepths))).byInterval;
    expect(pair.gaugeMm).toBeCloseTo(9 * 0.2, 12);
    expect(pair.radarMm).toBeCloseTo(9 * 0.3, 12);
    expect(pair.commonFraction).toBeCloseTo(9 / 12, 12);
    expect(pair.gaugeObservedFraction).toBeCloseTo(11 / 12, 12);
    expect(pair.radarObservedFraction).toBeCloseTo(10 / 12, 12);
    expect([pair.used, pair.reason]).toEqual([true, ""]);
  });

  test("a step the radar saw 95 % of counts, one it saw 90 % of does not", () => {
    const steps = radar(same(12, 1));
    const observedFraction = Float64Array.from(same(12, 1) as number[]);
    observedFraction[0] = 0.95;
    observedFraction[1] = 0.9;
    const [pair] = makePairs(input(gauge(5, same(12, 1)), { ...steps, observedFraction })).byInterval;
    expect(pair.gaugeMm).toBe(11);
    expect(pair.commonFraction).toBeCloseTo(10.95 / 12, 12);
  });

  test("zeros are observations: a dry hour on both sides is a used pair", () => {
    const [pair] = makePairs(input(gauge(5, same(12, 0)), radar(same(12, 0)))).byInterval;
    expect([pair.gaugeMm, pair.radarMm, pair.used]).toEqual([0, 0, true]);
  });

  test("the whole-window pair is the sum of the common time of all intervals", () => {
    const gaugeDepths = [...same(12, 0.5), ...same(3, undefined), ...same(9, 1)];
    const pairs = makePairs(input(gauge(5, gaugeDepths), radar(same(24, 2)), 2));
    expect(pairs.whole.gaugeMm).toBe(6 + 9);
    expect(pairs.whole.radarMm).toBe(24 + 18);
    expect(pairs.whole.commonFraction).toBe(21 / 24);
    expect(pairs.whole.endEpochMs - pairs.whole.startEpochMs).toBe(2 * HOUR);
  });
});

describe("a coarser gauge", () => {
  test("ten-minute readings on the same borders are compared in ten-minute steps", () => {
    // By hand: one missing radar step of five minutes takes its ten minutes out on both sides.
    const radarDepths = [...same(11, 0.3), undefined];
    const [pair] = makePairs(input(gauge(10, same(6, 1)), radar(radarDepths))).byInterval;
    expect(pair.gaugeMm).toBe(5);
    expect(pair.radarMm).toBeCloseTo(10 * 0.3, 12);
    expect(pair.commonFraction).toBeCloseTo(5 / 6, 12);
  });

  test("readings off the borders leave the interval as one, under the 95 % rule", () => {
    const offset = gauge(10, same(8, 1), -5);
    const full = makePairs(input(offset, radar(same(12, 0.5))));
    expect(full.byInterval[0].gaugeMm).toBeCloseTo(6, 12);
    expect(full.byInterval[0].used).toBe(true);
    // Half of the first and half of the last reading fall inside.
    expect(full.splitMm).toBeCloseTo(1, 12);
    const [holed] = makePairs(input(offset, radar([...same(11, 0.5), undefined]))).byInterval;
    expect(holed.used).toBe(false);
    expect(holed.reason).toBe(
      "each side must observe 95 % of the interval where gauge steps are longer than 5 min: gauge 100 %, radar 91 %",
    );
    expect(holed.gaugeMm).toBeNaN();
  });

  test("readings longer than the interval are not cut up, but the whole window is compared", () => {
    const base = input(gauge(60, [3, 4]), radar(same(24, 0.5)), 2);
    const window = { startEpochMs: START, endEpochMs: START + 2 * HOUR };
    const pairs = makePairs({ ...base, intervals: cutWindow(window, 15 * MINUTE) });
    expect(pairs.byInterval).toHaveLength(8);
    expect(pairs.byInterval.every((pair) => !pair.used && Number.isNaN(pair.gaugeMm))).toBe(true);
    expect(pairs.byInterval[0].reason).toBe("gauge reports every 60 min, longer than the interval");
    expect([pairs.whole.used, pairs.whole.gaugeMm, pairs.whole.radarMm]).toEqual([true, 7, 12]);
  });
});

describe("why a pair is not used", () => {
  test.each([
    ["no gauge data", same(12, undefined), same(12, 1)],
    ["radar did not observe", same(12, 1), same(12, undefined)],
    ["too little common time: 41 %, 50 % needed", [...same(5, 1), ...same(7, undefined)], same(12, 1)],
    [
      "too little common time: 0 %, 50 % needed",
      [...same(6, 1), ...same(6, undefined)],
      [...same(6, undefined), ...same(6, 1)],
    ],
  ])("%s", (reason, gaugeDepths, radarDepths) => {
    const [pair] = makePairs(input(gauge(5, gaugeDepths), radar(radarDepths))).byInterval;
    expect([pair.used, pair.reason]).toEqual([false, reason]);
  });

  test("without common time the depths are NaN, never 0", () => {
    const [pair] = makePairs(input(gauge(5, same(12, undefined)), radar(same(12, 1)))).byInterval;
    expect([pair.gaugeMm, pair.radarMm]).toEqual([Number.NaN, Number.NaN]);
  });

  test("exactly the least common share is enough", () => {
    const gaugeDepths = [...same(6, 1), ...same(6, undefined)];
    const [pair] = makePairs(input(gauge(5, gaugeDepths), radar(same(12, 1)))).byInterval;
    expect(pair.used).toBe(true);
  });

  test("a gauge left out keeps its depths and says why; an unused pair keeps its own reason", () => {
    const two = makePairs(input(gauge(5, [...same(12, 1), ...same(12, undefined)]), radar(same(24, 1)), 2));
    const left = leaveOut(two.byInterval, new Map([["moor\u001f007", "doubted: silent gauge"]]));
    expect(left.map((pair) => [pair.used, pair.reason])).toEqual([
      [false, "doubted: silent gauge"],
      [false, "no gauge data"],
    ]);
    expect(left[0].gaugeMm).toBe(12);
  });
});

test("intervals off the radar's steps or beyond them are a caller's mistake", () => {
  const base = input(gauge(5, same(12, 1)), radar(same(12, 1)));
  const at = (from: number, to: number) => ({
    ...base,
    intervals: [{ startEpochMs: START + from * MINUTE, endEpochMs: START + to * MINUTE }],
  });
  expect(() => makePairs(at(0, 7))).toThrow(RangeError);
  expect(() => makePairs(at(0, 65))).toThrow(RangeError);
  expect(() => makePairs({ ...base, intervals: [] })).toThrow(RangeError);
});
