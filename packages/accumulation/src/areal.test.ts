import type { Grid, Ring } from "@rainreckon/core";
import { checkValue } from "@rainreckon/test-data/published";
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { arealDepth, cellFractions } from "./areal.ts";

/** Unit cells with row 0 in the north; the published tables count rows from the south. */
const unitGrid: Grid = { crs: "plane", westM: 0, northM: 4, cellM: 1, nx: 4, ny: 4 };
const fromSouth = (rows: readonly (readonly number[])[]) => [...rows].reverse().flat();

function meanOf(grid: Grid, polygons: readonly (readonly Ring[])[], rain: readonly number[]): number {
  const count = grid.nx * grid.ny;
  const part = {
    depthMm: Float64Array.from(rain),
    observedMs: new Float64Array(count).fill(1000),
    cappedMm: new Float64Array(count),
  };
  return arealDepth(cellFractions(grid, polygons), part, 1000).depthMm;
}

describe("cellFractions", () => {
  // Reference book, section i; computed with R's sf package (see the entries' sources).
  test.each([
    ["i-area-triangle", ["polygon"]],
    ["i-area-concave-hole", ["outer", "hole"]],
  ])("%s: fractions and areal mean", (id, ringNames) => {
    const entry = checkValue(id);
    const inputs = entry.inputs as Record<string, [number, number][] & number[][]>;
    const expected = entry.expected as { fractions: number[][]; area: number; areal_mean: number };
    const rings = ringNames.map((name) => [...inputs[name], inputs[name][0]] as Ring);
    const { cells, fraction, areaM2 } = cellFractions(unitGrid, [rings]);
    const dense = new Float64Array(16);
    for (let k = 0; k < cells.length; k++) dense[cells[k]] = fraction[k];
    fromSouth(expected.fractions).forEach((value, cell) => {
      expect(Math.abs(dense[cell] - value)).toBeLessThan(1e-9);
    });
    expect(areaM2).toBeCloseTo(expected.area, 9);
    expect(meanOf(unitGrid, [rings], fromSouth(inputs.rain_mm))).toBeCloseTo(expected.areal_mean, 6);
  });

  // i-linear-field-mean (closed form): a linear field's mean is its value at the centroid, 6 mm. Cells hold
  // their own mean, the field at their centre, so cells cut by the border err by what a cell can.
  test("i-linear-field-mean: converges to the value at the centroid", () => {
    const cellM = 0.02;
    const grid: Grid = { crs: "plane", westM: 0, northM: 3, cellM, nx: 300, ny: 150 };
    const rain = Array.from({ length: 300 * 150 }, (_, cell) => {
      const x = ((cell % 300) + 0.5) * cellM;
      const y = 3 - (Math.floor(cell / 300) + 0.5) * cellM;
      return 2 + x + 2 * y;
    });
    const triangle: Ring = [
      [0, 0],
      [6, 0],
      [0, 3],
      [0, 0],
    ];
    expect(meanOf(grid, [[triangle]], rain)).toBeCloseTo(6, 2);
  });

  test("fractions of any triangle inside the grid sum to its area, whichever way it winds", () => {
    const coordinate = fc.double({ min: 0, max: 4, noNaN: true });
    fc.assert(
      fc.property(fc.array(fc.tuple(coordinate, coordinate), { minLength: 3, maxLength: 3 }), (corners) => {
        const [a, b, c] = corners;
        const area = Math.abs((b[0] - a[0]) * (c[1] - a[1]) - (c[0] - a[0]) * (b[1] - a[1])) / 2;
        for (const ring of [
          [a, b, c, a],
          [c, b, a, c],
        ]) {
          const { fraction } = cellFractions(unitGrid, [[ring]]);
          expect(fraction.reduce((sum, share) => sum + share, 0)).toBeCloseTo(area, 9);
        }
      }),
      { seed: 7, numRuns: 200 },
    );
  });

  test("an area that reaches beyond the grid says how much of it the grid covers", () => {
    const square: Ring = [
      [2, 1],
      [6, 1],
      [6, 3],
      [2, 3],
      [2, 1],
    ];
    expect(cellFractions(unitGrid, [[square]]).insideGrid).toBeCloseTo(0.5, 12);
    const outside: Ring = square.map(([x, y]) => [x + 10, y] as const);
    expect(cellFractions(unitGrid, [[outside]]).cells).toHaveLength(0);
  });
});

describe("arealDepth", () => {
  const square: Ring = [
    [0, 2],
    [2, 2],
    [2, 4],
    [0, 4],
    [0, 2],
  ];
  const area = cellFractions(unitGrid, [[square]]);

  test("what was not observed adds nothing: the depth is a lower bound and the share says so", () => {
    const depthMm = new Float64Array(16).fill(4);
    const observedMs = new Float64Array(16).fill(1000);
    depthMm[0] = Number.NaN;
    observedMs[0] = 0;
    const areal = arealDepth(area, { depthMm, observedMs, cappedMm: new Float64Array(16) }, 1000);
    expect(areal).toEqual({ depthMm: 3, observedFraction: 0.75, maxCellMm: 4, cappedMm: 0 });
  });

  test("nothing observed is NaN, never 0", () => {
    const nothing = {
      depthMm: new Float64Array(16).fill(Number.NaN),
      observedMs: new Float64Array(16),
      cappedMm: new Float64Array(16),
    };
    expect(arealDepth(area, nothing, 1000).depthMm).toBeNaN();
    expect(arealDepth(area, nothing, 1000).observedFraction).toBe(0);
  });
});
