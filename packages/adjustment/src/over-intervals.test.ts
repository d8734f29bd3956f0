import type { Grid } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { fieldAdjuster } from "./adjusted-field.ts";
import { meanRainShare, pairedDepthAt, spanDepthAt } from "./at-gauge.ts";
import { validateMethod } from "./choose-method.ts";
import { HOUR, network, SETTINGS } from "./invented-gauges.ts";
import { learnMethod } from "./methods.ts";

const OVER = { ...SETTINGS, over: "intervals" } as const;
/** What the gauges read of the radar in each hour; in the last hour it is dry. */
const FACTORS = [2, 1, 0.5, 0];
const gauges = network(12, (mm) => mm).map((gauge) => {
  const readings = gauge.readings.map((reading, hour) => ({
    ...reading,
    gaugeMm: reading.radarMm * FACTORS[hour],
  }));
  return { ...gauge, readings, gaugeMm: readings.reduce((sum, { gaugeMm }) => sum + gaugeMm, 0) };
});
const hours = [0, 1, 2, 3].map((hour) => ({ startEpochMs: hour * HOUR, endEpochMs: (hour + 1) * HOUR }));
const share = meanRainShare(gauges);

describe("intervals learned by themselves", () => {
  const learned = learnMethod("idw-multiplicative", gauges, OVER);

  // By construction: each hour has one factor of its own; the dry one takes that of the window, 3.5/4.
  test("each hour has its own field; one without rain at gauges takes that of the window, and that is said", () => {
    const grid: Grid = { crs: "plane", westM: 0, northM: 20_000, cellM: 10_000, nx: 2, ny: 2 };
    const hourMm = Float32Array.of(3, 4, Number.NaN, 0);
    const adjuster = fieldAdjuster(learned, {
      grid,
      totalMm: hourMm.map((mm) => 4 * mm),
      rangeKm: () => 50,
      share,
    });
    hours.forEach((hour, k) => {
      const adjusted = adjuster.interval(hour, hourMm);
      const factor = k === 3 ? 3.5 / 4 : FACTORS[k];
      [3, 4].forEach((mm, cell) => {
        expect(adjusted[cell]).toBeCloseTo(mm * factor, 5);
      });
      expect(adjusted[2]).toBeNaN();
      expect(adjusted[3]).toBe(0);
    });
    expect(learned.notes).toEqual([
      "1 of 4 intervals had too little rain at gauges: the field of the window in its place",
    ]);
  });

  test("a gauge is met hour by hour, and its window is their sum", () => {
    const [first] = gauges;
    const hourMm = first.radarMm / 4;
    expect(spanDepthAt(learned, first, hours[0], hourMm, share)).toBeCloseTo(2 * hourMm, 9);
    expect(spanDepthAt(learned, first, hours[2], hourMm, share)).toBeCloseTo(0.5 * hourMm, 9);
    const sumMm = (2 + 1 + 0.5 + 3.5 / 4) * hourMm;
    expect(pairedDepthAt(learned, first)).toBeCloseTo(sumMm, 9);
    const window = { startEpochMs: 0, endEpochMs: 4 * HOUR };
    expect(spanDepthAt(learned, first, window, first.radarMm, share)).toBeCloseTo(sumMm, 9);
  });

  test("is cross-validated like any other way, and a method without a field is what it was", () => {
    expect(validateMethod("brandes", gauges, OVER).validation.gaugeCount).toBe(12);
    const bias = learnMethod("mean-field-bias", gauges, OVER);
    expect(bias).toMatchObject({ kind: "factor", constant: true });
  });
});
