import { checkValue } from "@rainreckon/test-data/published";
import { expect, test } from "vitest";
import { closestOf3x3, radarAtGauge } from "./cell.ts";

const shape = { nx: 5, ny: 5 };
const matching = checkValue("d-matching");
const field = Float64Array.from((matching.inputs.grid_mm as number[][]).flat());
const centre = 2 * 5 + 2;

// Check value d-matching: an invented field of 5 x 5, the answers worked out independently.
test("the nearest cell, the mean and the closest of 3 x 3 are those worked out elsewhere", () => {
  const expected = matching.expected as { nearest: number; mean3x3: number; best_of_9: number };
  expect(radarAtGauge(field, shape, centre, "nearest")).toBe(expected.nearest);
  expect(radarAtGauge(field, shape, centre, "mean3x3")).toBeCloseTo(expected.mean3x3, 9);
  expect(closestOf3x3(field, shape, centre, 4.5)?.valueMm).toBe(expected.best_of_9);
});

test("of two cells equally close to the gauge the nearer one is taken (check value d-best-tie)", () => {
  const { inputs, expected } = checkValue("d-best-tie");
  const cells = Float64Array.from((inputs.pixels as number[][]).flat());
  expect(closestOf3x3(cells, { nx: 3, ny: 3 }, 4, inputs.gauge as number)).toEqual({
    valueMm: expected,
    index: 5,
  });
});

test("cells that were not observed stay out of the mean, and an unobserved own cell makes it NaN", () => {
  const cells = Float64Array.of(1, Number.NaN, 3, 4);
  expect(radarAtGauge(cells, { nx: 2, ny: 2 }, 0, "mean3x3")).toBeCloseTo((1 + 3 + 4) / 3, 12);
  expect(radarAtGauge(cells, { nx: 2, ny: 2 }, 1, "mean3x3")).toBeNaN();
});

test("neighbours are not looked for across the edge of the grid", () => {
  const cells = Float64Array.from({ length: 25 }, (_, i) => i);
  expect(radarAtGauge(cells, shape, 0, "mean3x3")).toBe((0 + 1 + 5 + 6) / 4);
  expect(radarAtGauge(cells, shape, 9, "mean3x3")).toBe((3 + 4 + 8 + 9 + 13 + 14) / 6);
});

test("without an observed cell there is no closest one", () => {
  expect(closestOf3x3(new Float64Array(9).fill(Number.NaN), { nx: 3, ny: 3 }, 4, 1)).toBeUndefined();
});

test("a cell outside the grid is a caller's mistake", () => {
  expect(() => radarAtGauge(field, shape, 25, "nearest")).toThrow(RangeError);
  expect(() => closestOf3x3(field, shape, -1, 1)).toThrow(RangeError);
});
