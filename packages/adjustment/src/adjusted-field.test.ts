import type { Grid } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { fieldAdjuster } from "./adjusted-field.ts";
import { meanRainShare, spanDepthAt } from "./at-gauge.ts";
import { gaugeAt, HOUR, network, SETTINGS } from "./invented-gauges.ts";
import { learnMethod, METHOD_NAMES } from "./methods.ts";

const grid: Grid = { crs: "plane", westM: 0, northM: 100_000, cellM: 20_000, nx: 5, ny: 5 };
const hours = [0, 1, 2, 3].map((hour) => ({ startEpochMs: hour * HOUR, endEpochMs: (hour + 1) * HOUR }));
/** Each cell's rain falls in other shares of the hours; cell 3 is dry all window long, cell 7 not observed. */
const intervalsMm = hours.map((_, k) =>
  Float32Array.from({ length: 25 }, (__, cell) =>
    cell === 3 ? 0 : cell === 7 ? Number.NaN : 1 + ((cell + 3 * k) % 7),
  ),
);
const totalMm = Float32Array.from({ length: 25 }, (_, cell) =>
  intervalsMm.reduce((sum, depthMm) => sum + depthMm[cell], 0),
);
const gauges = network(12, (mm, x) => mm * (1 + x / 100) + 3);
const share = meanRainShare(gauges);

describe("an adjusted field", () => {
  test.each(METHOD_NAMES)(
    "%s: intervals add up to the window, NaN stays NaN, nothing is negative",
    (name) => {
      const learned = learnMethod(name, gauges, SETTINGS);
      const adjuster = fieldAdjuster(learned, { grid, totalMm, rangeKm: () => 50, share });
      const adjusted = hours.map((hour, k) => adjuster.interval(hour, intervalsMm[k]));
      for (let cell = 0; cell < 25; cell++) {
        const depths = adjusted.map((depthMm) => depthMm[cell]);
        if (cell === 7) {
          expect(depths).toEqual(new Array(4).fill(Number.NaN));
          continue;
        }
        expect(Math.min(...depths)).toBeGreaterThanOrEqual(0);
        const x = 10 + 20 * (cell % 5);
        const y = 90 - 20 * Math.floor(cell / 5);
        const sum = depths.reduce((added, mm) => added + mm, 0);
        if (learned.kind === "field") expect(sum).toBeCloseTo(learned.depthMm(x, y, totalMm[cell], 50), 4);
        else
          hours.forEach(({ startEpochMs, endEpochMs }, k) => {
            const factor = learned.factorAt((startEpochMs + endEpochMs) / 2);
            expect(depths[k]).toBeCloseTo(intervalsMm[k][cell] * factor, 4);
          });
      }
    },
  );

  test("a field keeps each cell's shape in time", () => {
    const learned = learnMethod("kriging-additive", gauges, SETTINGS);
    const adjuster = fieldAdjuster(learned, { grid, totalMm, rangeKm: () => 50, share });
    const [first, second] = hours.map((hour, k) => adjuster.interval(hour, intervalsMm[k])[12]);
    expect(first / second).toBeCloseTo(intervalsMm[0][12] / intervalsMm[1][12], 5);
  });

  test("rain put where the radar saw none falls when it fell on the gauges", () => {
    const late = gauges.map((gauge) => ({
      ...gauge,
      readings: gauge.readings.map((reading, hour) => ({
        ...reading,
        gaugeMm: hour === 3 ? gauge.gaugeMm : 0,
      })),
    }));
    const learned = learnMethod("idw-additive", late, SETTINGS);
    const adjuster = fieldAdjuster(learned, {
      grid,
      totalMm,
      rangeKm: () => 50,
      share: meanRainShare(late),
    });
    const dry = hours.map((hour, k) => adjuster.interval(hour, intervalsMm[k])[3]);
    expect(dry.slice(0, 3)).toEqual([0, 0, 0]);
    expect(dry[3]).toBeGreaterThan(1);
  });

  test("asks for ranges only where they matter", () => {
    const asked: number[] = [];
    const rangeKm = (cell: number) => {
      asked.push(cell);
      return 50;
    };
    fieldAdjuster(learnMethod("idw-additive", gauges, SETTINGS), { grid, totalMm, rangeKm, share });
    expect(asked).toEqual([]);
    fieldAdjuster(learnMethod("range-dependent", gauges, SETTINGS), { grid, totalMm, rangeKm, share });
    expect(asked).toHaveLength(24);
  });
});

describe("shares of the window's rain", () => {
  // By hand: even rain over four hours; a reading is cut by time.
  test("add up over spans, readings cut by time", () => {
    expect(share({ startEpochMs: 0, endEpochMs: HOUR })).toBeCloseTo(0.25, 12);
    expect(share({ startEpochMs: HOUR / 2, endEpochMs: 2 * HOUR })).toBeCloseTo(0.375, 12);
    expect(share({ startEpochMs: 0, endEpochMs: 4 * HOUR })).toBeCloseTo(1, 12);
    expect(meanRainShare([])({ startEpochMs: 0, endEpochMs: HOUR })).toBe(0);
  });
});

describe("a span at a gauge", () => {
  test("a factor in time weights the hours by what the radar saw in each", () => {
    const learned = {
      kind: "factor" as const,
      constant: false,
      notes: [],
      factorAt: (epochMs: number) => (epochMs < 2 * HOUR ? 2 : 1),
    };
    // By hand: 1 mm an hour of radar, twice in the first two hours: 2 + 2 + 1 + 1 mm.
    const gauge = gaugeAt("a", [0, 0], 6, 4);
    const window = { startEpochMs: 0, endEpochMs: 4 * HOUR };
    expect(spanDepthAt(learned, gauge, window, 4, share)).toBeCloseTo(6, 12);
    expect(spanDepthAt(learned, gauge, hours[0], 1, share)).toBeCloseTo(2, 12);
    expect(spanDepthAt(learned, gauge, hours[0], Number.NaN, share)).toBeNaN();
  });
});
