import { expect, test } from "vitest";
import { errorFunction } from "./error-function.ts";

// Abramowitz and Stegun (1964), Table 7.1, ten decimals as printed.
test.each([
  [0, 0],
  [0.1, 0.112462916],
  [0.5, 0.5204998778],
  [1, 0.8427007929],
  [1.5, 0.9661051465],
  [2, 0.995322265],
])("erf(%d) = %d", (x, printed) => {
  expect(Math.abs(errorFunction(x) - printed)).toBeLessThanOrEqual(0.5e-10);
  expect(Math.abs(errorFunction(-x) + printed)).toBeLessThanOrEqual(0.5e-10);
});

test("tends to 1 without a step, and keeps NaN", () => {
  expect(errorFunction(5.999999)).toBe(1);
  expect(errorFunction(40)).toBe(1);
  expect(errorFunction(Number.NEGATIVE_INFINITY)).toBe(-1);
  expect(errorFunction(Number.NaN)).toBeNaN();
});
