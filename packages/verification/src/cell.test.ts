import { checkValue } from "@rainreckon/test-data/published";
import { expect, test } from "vitest";
import { closestOf3x3 } from "./cell.ts";

const shape = { nx: 5, ny: 5 };
const matching = checkValue("d-matching");
const field = Float64Array.from((matching.inputs.grid_mm as number[][]).flat());
const centre = 2 * 5 + 2;

// Check value d-matching: an invented field of 5 x 5, the answers worked out independently.
test("the closest of 3 x 3 is the one worked out elsewhere", () => {
  const expected = matching.expected as { best_of_9: number };
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

test("without an observed cell there is no closest one", () => {
  expect(closestOf3x3(new Float64Array(9).fill(Number.NaN), { nx: 3, ny: 3 }, 4, 1)).toBeUndefined();
});

test("a cell outside the grid is a caller's mistake", () => {
  expect(() => closestOf3x3(field, shape, 25, 1)).toThrow(RangeError);
  expect(() => closestOf3x3(field, shape, -1, 1)).toThrow(RangeError);
});
