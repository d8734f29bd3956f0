import type { Grid } from "@rainreckon/core";
import { expect, test } from "vitest";
import { depthAreaDuration, stormCentre } from "./depth-area-duration.ts";

const HOUR_MS = 3_600_000;
const NO = Number.NaN;
const grid: Grid = { crs: "plane", westM: 0, northM: 2000, cellM: 1000, nx: 3, ny: 2 };
const hours = (count: number) =>
  Array.from({ length: count }, (_, k) => ({ startEpochMs: k * HOUR_MS, endEpochMs: (k + 1) * HOUR_MS }));

// By hand. First hour: 9 beside 6 and 1, below them 3 2 8: from 9 grow 6, 3, 2, 8, 1 (8 waits until 2 is in).
// Second hour: even rain of 4, one cell not seen.
const FIRST = [9, 6, 1, 3, 2, 8];
const SECOND = [4, 4, NO, 4, 4, 4];
const storm = { grid, intervals: hours(2), depthMm: [FIRST, SECOND] };
const rows = (durations: number[], areas: number[], of: Parameters<typeof depthAreaDuration>[0] = storm) =>
  depthAreaDuration(
    of,
    durations.map((n) => n * HOUR_MS),
    areas,
  ).map(({ durationMs, areaKm2, depthMm, startEpochMs, centreCell }) => [
    durationMs / HOUR_MS,
    areaKm2,
    depthMm,
    startEpochMs / HOUR_MS,
    centreCell,
  ]);

test("a worked case: the area grows from its deepest cell, in one piece", () => {
  expect(rows([1], [2, 3, 5])).toEqual([
    [1, 1, 9, 0, 0],
    [1, 2, 7.5, 0, 0],
    [1, 3, 6, 0, 0],
    [1, 5, 28 / 5, 0, 0],
  ]);
});

test("two hours add up, and a cell that was not seen in one of them has what it was seen to have", () => {
  // Sums: 13 10 1 / 7 6 12.
  expect(rows([2], [2, 6])).toEqual([
    [2, 1, 13, 0, 0],
    [2, 2, 11.5, 0, 0],
    [2, 6, 49 / 6, 0, 0],
  ]);
});

test("an area beyond what was observed, and a duration beyond the window, are left out", () => {
  const half = { ...storm, intervals: hours(1), depthMm: [SECOND] };
  expect(rows([1, 2], [5, 6], half)).toEqual([
    [1, 1, 4, 0, 0],
    [1, 5, 4, 0, 0],
  ]);
  expect(rows([1], [1], { ...half, depthMm: [[NO, NO, NO, NO, NO, NO]] })).toEqual([]);
});

test("another hour counts where it is deeper over the area", () => {
  expect(rows([1], [1, 6], { ...storm, depthMm: [FIRST, [5, 5, 5, 5, 5, 5]] })).toEqual([
    [1, 1, 9, 0, 0],
    [1, 6, 5, 1, 0],
  ]);
});

test("the centre of a storm is its deepest cell; the middle of its rain lies between its halves", () => {
  // 3 mm at the west end of the upper row and 1 mm at its east end: a quarter of the way, 500 m + 2 km / 4.
  expect(stormCentre(grid, [3, 0, 1, NO, 0, 0])).toEqual({
    deepestCell: 0,
    deepestMm: 3,
    centroidXM: 1000,
    centroidYM: 1500,
  });
  expect(stormCentre(grid, [0, 0, 0, NO, 0, 0])).toBeUndefined();
});
