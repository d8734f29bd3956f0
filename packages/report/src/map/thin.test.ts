import { expect, test } from "vitest";
import { pictureBlock, thin } from "./thin.ts";

const NO = Number.NaN;

// Expected values by hand.
test("a picture cell is the mean of its observed cells, and not observed only where none was", () => {
  // biome-ignore format: rows as they lie on the map
  const values = Float32Array.of(
    1, 3, NO, NO, 7,
    NO, 5, NO, NO, 9,
    2, 2, 0, 4, NO,
  );
  const picture = thin(values, 5, 3, "mean", 3);
  expect([picture.nx, picture.ny, picture.block]).toEqual([3, 2, 2]);
  expect([...picture.values]).toEqual([3, NO, 8, 2, 2, NO]);
});

test("names are not averaged: the most frequent stands, the lower on a tie", () => {
  expect([...thin(Float32Array.of(2, 0, 2, NO), 2, 2, "most", 1).values]).toEqual([2]);
  expect([...thin(Float32Array.of(1, 0, NO, NO), 2, 2, "most", 1).values]).toEqual([0]);
  expect([...thin(Float32Array.of(NO, NO, NO, NO), 2, 2, "most", 1).values]).toEqual([NO]);
});

test.each([
  [300, 300, 1],
  [301, 10, 2],
  [10, 4000, 14],
])("a grid of %d x %d is thinned by %d", (nx, ny, block) => {
  expect(pictureBlock(nx, ny)).toBe(block);
});

test("a field that does not fill its grid is refused", () => {
  expect(() => thin(new Float32Array(5), 2, 3, "mean")).toThrow(RangeError);
});
