import { uniformStream } from "@rainreckon/verification";
import { expect, test } from "vitest";
import { normalNumber, randomField } from "./random-field.ts";

const GRID = { crs: "", westM: 0, northM: 20_000, cellM: 1000, nx: 20, ny: 20 };
const FIELDS = 2000;

test("fields have mean 0, variance 1, tails of a normal variable, and the correlation asked for", () => {
  const uniform = uniformStream(1);
  const field = new Float64Array(400);
  const apart = [0, 1, 5, 15];
  const products = apart.map(() => 0);
  const slanted = { product: 0, beyond: 0, sum: 0 };
  for (let k = 0; k < FIELDS; k++) {
    randomField(GRID, 5, uniform, field);
    // Row 9, columns 2 on; and from row 2, column 2 to row 6, column 5: 5 km.
    for (const [i, distance] of apart.entries())
      products[i] += field[9 * 20 + 2] * field[9 * 20 + 2 + distance];
    slanted.product += field[2 * 20 + 2] * field[6 * 20 + 5];
    if (Math.abs(field[0]) > 1.2815515655446004) slanted.beyond++;
    slanted.sum += field[399];
  }
  // Four standard errors of a mean of 2,000 products: 4 sqrt(2 / 2000) = 0.13 at most.
  for (const [i, distance] of apart.entries()) {
    expect(Math.abs(products[i] / FIELDS - Math.exp(-distance / 5))).toBeLessThan(0.13);
  }
  expect(Math.abs(slanted.product / FIELDS - Math.exp(-1))).toBeLessThan(0.13);
  expect(Math.abs(slanted.sum / FIELDS)).toBeLessThan(4 / Math.sqrt(FIELDS));
  // A fifth lies beyond: binomial, four standard errors are 0.036.
  expect(Math.abs(slanted.beyond / FIELDS - 0.2)).toBeLessThan(0.036);
});

test("the same stream gives the same field", () => {
  const [a, b] = [new Float64Array(400), new Float64Array(400)];
  randomField(GRID, 5, uniformStream(3), a);
  randomField(GRID, 5, uniformStream(3), b);
  expect(b).toEqual(a);
  randomField(GRID, 5, uniformStream(4), b);
  expect(b).not.toEqual(a);
});

test("normal numbers are normal", () => {
  const uniform = uniformStream(5);
  const drawn = Array.from({ length: 4000 }, () => normalNumber(uniform));
  const mean = drawn.reduce((sum, value) => sum + value, 0) / 4000;
  expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(4000));
  expect(drawn.filter((value) => value < 1.2815515655446004).length / 4000).toBeCloseTo(0.9, 1.5);
});
