import { describe, expect, test } from "vitest";
import { counterIncrements } from "./counter.ts";

/** Levels five minutes apart; at most 50 mm a minute, 250 mm a step. */
const count = (levels: readonly number[], rollsOverAtMm?: number) => {
  const { incrementMm, outcomes } = counterIncrements(
    levels,
    levels.map((_, index) => index * 300_000),
    { jitterMm: 0.3, rollsOverAtMm, maxMmPerMinute: 50 },
  );
  return outcomes.map((outcome, index) => [outcome, Math.round(incrementMm[index] * 1e9) / 1e9]);
};

// Expected values counted by hand from the rules at the function.
describe("increments of a counter", () => {
  test("a fall of exactly the jitter is jitter, though 1.0 - 0.7 is more than 0.3 in binary", () => {
    expect(count([1, 0.7, 1.2])).toEqual([
      ["first", Number.NaN],
      ["jitter", 0],
      ["ok", 0.2],
    ]);
  });

  test("a level that drops out and comes back is no reset: 200 mm are not counted anew", () => {
    expect(count([200, 0, 200.4, 200.6])).toEqual([
      ["first", Number.NaN],
      ["outlier", Number.NaN],
      ["ok", 0.4],
      ["ok", 0.2],
    ]);
  });

  test("a level that jumps up and comes back is no rain, and no reset either", () => {
    expect(count([12, 900, 12.2])).toEqual([
      ["first", Number.NaN],
      ["outlier", Number.NaN],
      ["ok", 0.2],
    ]);
  });

  test("a level that jumps up and stays gives no increment, and is counted on from", () => {
    expect(count([12, 900, 900.4])).toEqual([
      ["first", Number.NaN],
      ["impossible", Number.NaN],
      ["ok", 0.4],
    ]);
  });

  test("a fall to more than half is hard to believe in as a reset", () => {
    expect(count([180, 120, 120.2])[1]).toEqual(["doubtful-reset", 120]);
  });

  test("a counter with an end is still reset where the rise past the end would be large", () => {
    expect(count([12.4, 0.2, 0.4], 1000)[1]).toEqual(["reset", 0.2]);
    expect(count([999, 3, 4], 1000)[1]).toEqual(["rollover", 4]);
  });

  test("missing levels at both ends give nothing", () => {
    expect(count([Number.NaN, 1, Number.NaN]).map(([outcome]) => outcome)).toEqual([
      "missing",
      "first",
      "missing",
    ]);
  });
});
