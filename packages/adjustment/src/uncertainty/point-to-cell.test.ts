import { expect, test } from "vitest";
import { pointToCellVariance } from "./point-to-cell.ts";

const GRID = { crs: "", westM: 0, northM: 3000, cellM: 1000, nx: 3, ny: 3 };

// A plane rising 2 mm a cell to the east and 1 mm to the south: by hand, a point anywhere in a cell has a variance of
// (2² + 1²) / 12 = 0.416667 mm² about the mean of its cell.
test("a point under a plane has the variance of an even distribution across its cell", () => {
  const plane = Float32Array.from({ length: 9 }, (_, cell) => 2 * (cell % 3) + Math.floor(cell / 3));
  expect(pointToCellVariance(GRID, plane, 4)).toBeCloseTo(5 / 12, 10);
});

test("edges and cells that were not observed take what is beside them; alone there is none", () => {
  const ramp = Float32Array.from({ length: 9 }, (_, cell) => 2 * (cell % 3));
  // East only and south: (2² / 2 + 0) / 2 / 3.
  expect(pointToCellVariance(GRID, ramp, 0)).toBeCloseTo(1 / 3, 10);
  ramp[1] = Number.NaN;
  expect(pointToCellVariance(GRID, ramp, 0)).toBe(0);
  ramp[3] = Number.NaN;
  expect(pointToCellVariance(GRID, ramp, 0)).toBe(0);
});
