import type { Field, Grid } from "@rainreckon/core";
import { checkValue } from "@rainreckon/test-data/published";
import { describe, expect, test } from "vitest";
import { isohyetLevels, isohyets } from "./isohyet.ts";
import { cellsForPoint, pointDepth } from "./point.ts";

const grid: Grid = { crs: "plane", westM: -10_000, northM: 20_000, cellM: 500, nx: 80, ny: 60 };
const field = (value: (xM: number, yM: number) => number): Field<"depthMm"> => ({
  grid,
  quantity: "depthMm",
  values: Float32Array.from({ length: 80 * 60 }, (_, cell) =>
    value(-10_000 + ((cell % 80) + 0.5) * 500, 20_000 - (Math.floor(cell / 80) + 0.5) * 500),
  ),
});

describe("isohyets", () => {
  test("the isohyet of a cone is the circle it must be, at its place", () => {
    const [line] = isohyets(
      field((x, y) => Math.max(0, 50 - Math.hypot(x - 7000, y - 4000) / 200)),
      [20],
    );
    expect(line.lines).toHaveLength(1);
    for (const [x, y] of line.lines[0])
      expect(Math.abs(Math.hypot(x - 7000, y - 4000) - 6000)).toBeLessThan(30);
    const [first, last] = [line.lines[0][0], line.lines[0][line.lines[0].length - 1]];
    expect(last).toEqual(first);
  });

  test("the isohyet of a slope is straight and ends at the edge of what was observed, not along it", () => {
    const slope = field((x, y) => (y < 0 ? Number.NaN : (x + 10_000) / 1000));
    const [line] = isohyets(slope, [12.3]);
    const points = line.lines.flat();
    expect(points.length).toBeGreaterThan(30);
    for (const [x, y] of points) {
      expect(x).toBeCloseTo(2300, -1);
      expect(y).toBeGreaterThan(-1);
    }
  });

  test.each([
    [7, [1, 2, 3, 4, 5, 6]],
    [80, [10, 20, 30, 40, 50, 60, 70]],
    [0.9, [0.2, 0.4, 0.6, 0.8]],
    [0, []],
  ])("levels for a largest depth of %d mm", (maxMm, levels) => {
    expect(isohyetLevels(maxMm)).toEqual(levels);
  });
});

describe("points", () => {
  const small: Grid = { crs: "plane", westM: 0, northM: 3, cellM: 1, nx: 3, ny: 3 };
  const values = Float64Array.of(1, 2, 3, 4, 5, 6, 7, Number.NaN, 9);

  // Check value d-matching: an invented field of 5 x 5, the answers worked out independently.
  test("the nearest cell and the mean of 3 x 3 are those worked out elsewhere", () => {
    const { inputs, expected } = checkValue("d-matching");
    const field = Float64Array.from((inputs.grid_mm as number[][]).flat());
    const part = { depthMm: field, observedMs: new Float64Array(25).fill(1000) };
    const known = expected as { nearest: number; mean3x3: number };
    const at = (rule: "nearest" | "mean3x3") =>
      pointDepth(cellsForPoint({ nx: 5, ny: 5 }, 12, rule), part, 1000).depthMm;
    expect(at("nearest")).toBe(known.nearest);
    expect(at("mean3x3")).toBeCloseTo(known.mean3x3, 9);
  });

  test("a mean over cells leaves out what was not observed and says how much was", () => {
    const observedMs = Float64Array.from(values, (value) => (Number.isNaN(value) ? 0 : 1000));
    const point = pointDepth([0, 1, 2, 3, 4, 5, 6, 7, 8], { depthMm: values, observedMs }, 1000);
    expect(point.depthMm).toBeCloseTo(37 / 8, 12);
    expect(point.observedFraction).toBeCloseTo(8 / 9, 12);
  });

  test("a gauge at the grid's corner is stood for by the cells there are, one outside by none", () => {
    expect(cellsForPoint(small, 0, "mean3x3")).toEqual([0, 1, 3, 4]);
    expect(cellsForPoint(small, 4, "nearest")).toEqual([4]);
    expect(cellsForPoint(small, -1, "mean3x3")).toEqual([]);
  });
});
