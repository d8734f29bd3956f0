import { describe, expect, test } from "vitest";
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

describe("kriging from the nearest gauges", () => {
  const whole = krigingSystem({ places, values, model, errorVariance });
  const local = localKriging({ places, values, model, errorVariance }, 32);
  if (typeof whole === "string" || local === "singular") throw new Error("singular");

  // Cells stand at least 15 km inside the network: outside it gauges lie on one side only, and there the
  // two part by a little more.
  test("is within 1 % of kriging from all of them, value and standard error, at 1000 scattered cells", () => {
    for (let i = 0; i < 1000; i++) {
      const x = 15 + 270 * scattered(i, 2);
      const y = 15 + 270 * scattered(i, 3);
      const all = whole.estimate(x, y);
      const near = local.estimate(x, y);
      expect(Math.abs(near.value / all.value - 1)).toBeLessThan(0.01);
      expect(Math.abs(Math.sqrt(near.variance / all.variance) - 1)).toBeLessThan(0.01);
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

  // The search by bins against sorting all distances, inside the network and far outside it.
  test.each([
    [10, 290],
    [150, 150],
    [-400, 900],
    [301, -2],
  ])("from (%d, %d) the neighbours are the nearest ones", (x, y) => {
    const nearest = places.xKm
      .map((placeX, i) => ({ i, distance: Math.hypot(placeX - x, places.yKm[i] - y) }))
      .sort((a, b) => a.distance - b.distance)
      .slice(0, 16)
      .map(({ i }) => i);
    const pick = (of: readonly number[]) => nearest.map((i) => of[i]);
    const expected = krigingSystem({
      places: { xKm: pick(places.xKm), yKm: pick(places.yKm) },
      values: pick(values),
      model,
      errorVariance: pick(errorVariance),
    });
    const near = localKriging({ places, values, model, errorVariance }, 16);
    if (typeof expected === "string" || near === "singular") throw new Error("singular");
    expect(near.estimate(x, y).value).toBeCloseTo(expected.estimate(x, y).value, 9);
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
