import { expect, test } from "vitest";
import { errorFunction, scaledErrorComplement } from "./error-function.ts";

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

// scipy.special.erfcx of SciPy 1.17, which computes it by Chebyshev polynomials.
test.each([
  [0, 1],
  [0.5, 0.6156903441929258],
  [1, 0.427583576155807],
  [2, 0.2553956763105058],
  [2.49, 0.2115523393550635],
  [2.5, 0.2108063640611436],
  [3, 0.17900115118138998],
  [5, 0.11070463773306863],
  [10, 0.05614099274382259],
  [30, 0.018795888861416754],
  [1e3, 0.0005641893014533876],
])("exp(x²) erfc(x) at %d", (x, expected) => {
  expect(Math.abs(scaledErrorComplement(x) / expected - 1)).toBeLessThan(1e-12);
});
