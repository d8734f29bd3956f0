import { expect, test } from "vitest";
import { seedsOf } from "../bench/ablation/options.ts";
import { commonCells, extremesOf, median, nearestRank, scoreMap } from "../bench/ablation/scores.ts";
import { ALL, merged, RAW, STEPS, variantsFor, without } from "../bench/ablation/variants.ts";
import { planSchema } from "../src/plan/schema.ts";

// Worked by hand: errors 1, -1, 2 and none; the fourth cell does not count.
const truth = Float32Array.of(2, 4, 6, 100);
const estimate = Float32Array.of(3, 3, 8, 0);
const use = Uint8Array.of(1, 1, 1, 0);

test("a map is scored on the cells that count", () => {
  const score = scoreMap(estimate, truth, use, Float32Array.of(5, 20, 80, 5));
  expect(score.cells).toBe(3);
  // Errors 1, -1 and 2: root of 6/3.
  expect(score.rmseMm).toBeCloseTo(Math.sqrt(2), 12);
  expect(score.biasRatio).toBeCloseTo(14 / 12, 12);
  // Deviations (-2, 0, 2) and (-5/3, -5/3, 10/3): 10 / sqrt(8 · 150/9).
  expect(score.correlation).toBeCloseTo(10 / Math.sqrt((8 * 150) / 9), 12);
  expect(score.biasByRange).toEqual([3 / 2, 3 / 4, Number.NaN, Number.NaN, 8 / 6]);
});

test("a cell that one map did not observe counts for none", () => {
  const half = Float32Array.of(1, 0.9375, 0.5);
  const whole = Float32Array.of(0.9, 1, 1);
  expect([...commonCells([half, whole], 0.9375)]).toEqual([0, 1, 0]);
});

test("median and nearest rank", () => {
  expect([median([3, 1, 2]), median([4, 1, 2, 3]), median([])]).toEqual([2, 2.5, Number.NaN]);
  // 95 % of 20 values is the 19th.
  expect(
    nearestRank(
      Array.from({ length: 20 }, (_, i) => 20 - i),
      0.95,
    ),
  ).toBe(19);
  expect(nearestRank([], 0.95)).toBeNaN();
});

test("extremes look at wet cells that count, and pass over what was not observed", () => {
  const hours = [Float32Array.of(1, Number.NaN, 5, 90), Float32Array.of(2, 3, 3, 9)];
  expect(extremesOf(Float32Array.of(0.9, 3, 8, 99), hours, use)).toEqual({ wet95Mm: 8, peakHourMm: 5 });
});

test("an overlay is laid key by key, and over each item of a list", () => {
  const base = { a: { x: 1, y: 2 }, list: [{ id: 1 }, { id: 2 }], grid: [1, 2] };
  expect(merged(base, { a: { y: 3 }, list: { cap: 9 }, grid: [3] })).toEqual({
    a: { x: 1, y: 3 },
    list: [
      { id: 1, cap: 9 },
      { id: 2, cap: 9 },
    ],
    grid: [3],
  });
});

test("every setting of the echo that switches a step is a step of the ablation", () => {
  const plan = {
    title: "t",
    window: { from: "2031-05-20T12:00:00Z", to: "2031-05-20T13:00:00Z" },
    radars: [{ id: "zz", medianRoundMinutes: 5, maxGapMinutes: 12.5 }],
    grid: { crs: "EPSG:3035", westM: 0, northM: 0, cellM: 1000, nx: 1, ny: 1 },
  };
  const of = (overlay: object) => planSchema.parse(merged(plan, { ...overlay }));
  const [raw, all] = [of(RAW.overlay), of(ALL.overlay)];
  // A fresh plan has every step, but for the terrain, which it does not know.
  const fresh = of({});
  expect(all).toEqual({
    ...fresh,
    echo: { ...fresh.echo, blockage: { ...fresh.echo.blockage, terrain: "terrain.tif" } },
  });
  expect(raw.radars[0]!.cap).toEqual({ dbz: 80 });
  for (const step of STEPS) {
    expect(of(without(step.name).overlay), step.name).not.toEqual(all);
    expect(of(merged(RAW.overlay, step.on)), step.name).not.toEqual(raw);
  }
  // With all steps off nothing is left on.
  expect(JSON.stringify(raw.echo)).not.toMatch(/true|auto|if-told/);
  expect(variantsFor("mixed", true)).toHaveLength(2 + 2 * STEPS.length);
});

test("seeds are numbers and runs of numbers", () => {
  expect(seedsOf("1-3,11")).toEqual([1, 2, 3, 11]);
  expect(() => seedsOf("one")).toThrow("no seeds: one");
});
