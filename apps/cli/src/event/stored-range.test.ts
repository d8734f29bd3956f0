import { expect, test } from "vitest";
import { storedRange } from "./stored-range.ts";

const HOUR_MS = 3_600_000;
const NO = Number.NaN;
// Four steps of an hour; the deepest has a range of a factor of 4 either way, the window one of 2.
const rain = {
  startEpochMs: 0,
  stepMs: HOUR_MS,
  depthMm: Float64Array.of(1, 8, 2, 1),
  observedFraction: Float64Array.of(1, 1, 1, 1),
  atCap: new Uint8Array(4),
};
const steps = { p10Mm: Float64Array.of(0.25, 2, 0.5, 0.25), p90Mm: Float64Array.of(4, 32, 8, 4) };
const window = { depthMm: 12, p10Mm: 6, p90Mm: 24 };

test("a step has its own range, the window its own", () => {
  const rangeOf = storedRange(rain, steps, window);
  expect(rangeOf({ from: 1, to: 2 }, 8)).toEqual({
    p10Mm: expect.closeTo(2, 9),
    p90Mm: expect.closeTo(32, 9),
  });
  expect(rangeOf({ from: 0, to: 4 }, 12)).toEqual({
    p10Mm: expect.closeTo(6, 9),
    p90Mm: expect.closeTo(24, 9),
  });
});

// 2 (u - 1 + exp(-u)) / u2 (Taylor 1922) by hand: 0.735759 at 1, 0.567668 at 2, 0.377289 at 4. Two hours are
// (0.567668 - 0.377289) / (0.735759 - 0.377289) = 0.53109 of the way; the squares of ln 2 and ln 4 are 0.480453 and
// 1.921812, between them lies 1.245944, and exp of its root is 3.0533.
test("between them the variance goes as that of a mean of errors with a memory of an hour", () => {
  const { p10Mm, p90Mm } = storedRange(rain, steps, window)({ from: 1, to: 3 }, 10);
  expect(p90Mm).toBeCloseTo(30.533, 2);
  expect(p10Mm).toBeCloseTo(10 / 3.0533, 3);
});

test("where the run does not say, nothing is told", () => {
  const none = { p10Mm: null, p90Mm: null };
  const dry = { ...rain, depthMm: Float64Array.of(0, 0, 0, 0) };
  expect(storedRange(rain, steps, { ...window, p10Mm: NO })({ from: 1, to: 2 }, 8)).toEqual(none);
  expect(
    storedRange(rain, { ...steps, p10Mm: Float64Array.of(NO, NO, NO, NO) }, window)({ from: 0, to: 2 }, 9),
  ).toEqual(none);
  expect(storedRange(dry, steps, window)({ from: 0, to: 2 }, 0)).toEqual(none);
});
