import { describe, expect, test } from "vitest";
import { krigingAccuracy } from "../bench/kriging-accuracy.ts";
import { choleskyInPlace, solveLowerInPlace, solveUpperInPlace } from "./cholesky.ts";
import { scattered } from "./invented-gauges.ts";
import { krigingSystem } from "./kriging.ts";
import { localKriging } from "./local-kriging.ts";
import type { VariogramModel } from "./variogram-model.ts";

const COUNT = 300;
const places = {
  xKm: Array.from({ length: COUNT }, (_, i) => 300 * scattered(i, 0)),
  yKm: Array.from({ length: COUNT }, (_, i) => 300 * scattered(i, 1)),
};
/** An invented rain field. */
const values = places.xKm.map((x, i) => 30 + 12 * Math.sin(x / 35) * Math.cos(places.yKm[i] / 50));
const model: VariogramModel = { shape: "exponential", nugget: 0, partialSill: 80, rangeKm: 40 };
const errorVariance = new Array(COUNT).fill(1);

describe("kriging from the gauges around", () => {
  const whole = krigingSystem({ places, values, model, errorVariance });
  const local = localKriging({ places, values, model, errorVariance });
  if (typeof whole === "string" || local === "singular") throw new Error("singular");

  // The bench does the same with 1,000 gauges on 10⁶ cells.
  test("is within 1 % of one system of all gauges, value and standard error, and shows no seams", () => {
    const accuracy = krigingAccuracy({ gaugeCount: 300, sideCells: 300, neighbours: 16, checkedCells: 1000 });
    expect(accuracy.valueApart.largest).toBeLessThan(0.01);
    expect(accuracy.standardErrorApart.largest).toBeLessThan(0.01);
    for (const seams of [accuracy.seamsOfValue, accuracy.seamsOfVariance]) {
      expect(seams.largestStepAcross).toBeLessThan(1.1 * seams.largestStepInside);
      expect(seams.largestBendAcross).toBeLessThan(1.1 * seams.largestBendInside);
    }
  });

  // A model that screens little: what stands far off still counts.
  test("a range of twelve spacings and a quarter of the variance for error keep it within 2 %", () => {
    const far: VariogramModel = { shape: "spherical", nugget: 0, partialSill: 80, rangeKm: 200 };
    const loud = new Array(COUNT).fill(20);
    const all = krigingSystem({ places, values, model: far, errorVariance: loud });
    const near = localKriging({ places, values, model: far, errorVariance: loud });
    if (typeof all === "string" || near === "singular") throw new Error("singular");
    for (let i = 0; i < 500; i++) {
      const [x, y] = [300 * scattered(i, 2), 300 * scattered(i, 3)];
      const expected = all.estimate(x, y);
      expect(Math.abs(near.value(x, y) / expected.value - 1)).toBeLessThan(0.02);
      expect(Math.abs(Math.sqrt(near.estimate(x, y).variance / expected.variance) - 1)).toBeLessThan(0.02);
    }
  });

  test("one by one or all at once, targets get the same", () => {
    const xKm = Float64Array.from({ length: 40 }, (_, i) => 320 * scattered(i, 4) - 10);
    const yKm = Float64Array.from({ length: 40 }, (_, i) => 320 * scattered(i, 5) - 10);
    const value = new Float64Array(40);
    const variance = new Float64Array(40);
    local.estimateAll(xKm, yKm, value, variance);
    for (let i = 0; i < 40; i++) {
      const single = { ...local.estimate(xKm[i], yKm[i]) };
      expect(value[i]).toBe(single.value);
      expect(variance[i]).toBe(single.variance);
      expect(local.value(xKm[i], yKm[i])).toBeCloseTo(single.value, 10);
    }
  });

  test("with as many neighbours as gauges it is kriging from all of them", () => {
    const every = localKriging({ places, values, model, errorVariance }, COUNT);
    if (every === "singular") throw new Error(every);
    const all = whole.estimate(123.4, 56.7);
    const near = every.estimate(123.4, 56.7);
    expect(near.value).toBeCloseTo(all.value, 9);
    expect(near.variance).toBeCloseTo(all.variance, 9);
  });

  // Places as far away as a mistyped coordinate puts them.
  test.each([
    [-400, 900],
    [1e6, -1e6],
  ])("far outside, at (%d, %d), it says what all gauges say", (x, y) => {
    const all = whole.estimate(x, y);
    const near = local.estimate(x, y);
    expect(near.value).toBeCloseTo(all.value, 6);
    expect(near.variance).toBeCloseTo(all.variance, 6);
  });

  test("gauges in one place without an error are singular, and said to be", () => {
    const twins = { xKm: [1, 1, 5], yKm: [2, 2, 9] };
    expect(localKriging({ places: twins, values: [1, 2, 3], model }, 3)).toBe("singular");
    expect(krigingSystem({ places: twins, values: [1, 2, 3], model })).toBe("singular");
  });
});

describe("a drift that cannot be told", () => {
  const three = { xKm: [0, 10, 25, 40], yKm: [0, 0, 0, 0] };
  test.each([
    ["constant", [[5, 5, 5, 5]]],
    [
      "x and y of gauges on one line (check value f-degenerate)",
      [
        [0, 10, 25, 40],
        [0, 0, 0, 0],
      ],
    ],
    [
      "one column twice",
      [
        [1, 4, 2, 8],
        [2, 8, 4, 16],
      ],
    ],
    [
      "as many columns as gauges",
      [
        [1, 4, 2, 8],
        [2, 1, 7, 3],
        [3, 3, 1, 9],
        [1, 0, 0, 0],
      ],
    ],
  ])("%s is refused", (_what, drift) => {
    expect(krigingSystem({ places: three, values: [1, 2, 3, 4], model, drift })).toBe(
      "drift not identifiable",
    );
  });
});

describe("Cholesky", () => {
  // By hand: the lower factor of [[4, 2], [2, 5]] is [[2, 0], [1, 2]]; the system with (8, 13) has (7/8, 9/4).
  test("factors and solves", () => {
    const matrix = Float64Array.of(4, 2, 2, 5);
    expect(choleskyInPlace(matrix, 2)).toBe(true);
    expect([matrix[0], matrix[2], matrix[3]]).toEqual([2, 1, 2]);
    const x = Float64Array.of(8, 13);
    solveLowerInPlace(matrix, 2, x);
    solveUpperInPlace(matrix, 2, x);
    expect([...x]).toEqual([0.875, 2.25]);
  });

  test("a matrix that is not positive definite is refused", () => {
    expect(choleskyInPlace(Float64Array.of(1, 2, 2, 1), 2)).toBe(false);
    expect(choleskyInPlace(Float64Array.of(1, 1, 1, 1), 2)).toBe(false);
  });
});
