import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { changeSteps, roundKeepingSum } from "./step-change.ts";
import { cutWindow } from "./steps.ts";

const MINUTE = 60_000;
const steps = (fromMin: number, toMin: number, stepMin: number) =>
  cutWindow({ startEpochMs: fromMin * MINUTE, endEpochMs: toMin * MINUTE }, stepMin * MINUTE);

describe("changeSteps", () => {
  test("three steps of 5 min are one of 15", () => {
    expect([...changeSteps(steps(0, 30, 5), [1, 2, 3, 0, 0, 0.5], steps(0, 30, 15))]).toEqual([6, 0.5]);
  });

  test("a step is cut by time: 10 min of a step of 15 hold two thirds of it", () => {
    const told = changeSteps(steps(0, 30, 15), [3, 6], steps(0, 30, 10));
    // By hand: 3 × 10/15; 3 × 5/15 + 6 × 5/15; 6 × 10/15.
    expect([...told]).toEqual([2, 3, 4]);
  });

  test("a new step with a part that nobody observed is not observed, and its neighbours are", () => {
    const told = changeSteps(steps(0, 30, 5), [1, Number.NaN, 1, 1, 1, 1], steps(0, 30, 15));
    expect([...told]).toEqual([Number.NaN, 3]);
  });

  test("a new step that reaches beyond the old ones is not observed: a part is no depth of the whole", () => {
    const wanted = [
      { startEpochMs: 0, endEpochMs: 15 * MINUTE },
      { startEpochMs: 15 * MINUTE, endEpochMs: 30 * MINUTE },
    ];
    expect([...changeSteps(steps(5, 30, 5), [1, 1, 1, 1, 1], wanted)]).toEqual([Number.NaN, 3]);
  });

  test("no water is gained or lost, whatever the steps (2,000 seeded series)", () => {
    const series = fc.record({
      depths: fc.array(fc.double({ min: 0, max: 50, noNaN: true }), { minLength: 12, maxLength: 12 }),
      step: fc.constantFrom(1, 2, 3, 4, 5, 6, 10, 12, 15, 20, 30, 60),
    });
    fc.assert(
      fc.property(series, ({ depths, step }) => {
        const told = changeSteps(steps(0, 60, 5), depths, steps(0, 60, step));
        const sum = (list: Iterable<number>) => [...list].reduce((total, depth) => total + depth, 0);
        expect(told).toHaveLength(60 / step);
        expect(sum(told)).toBeCloseTo(sum(depths), 9);
      }),
      { seed: 20, numRuns: 2000 },
    );
  });
});

describe("roundKeepingSum", () => {
  test("thirds of a tenth add up to it", () => {
    expect([...roundKeepingSum([0.1 / 3, 0.1 / 3, 0.1 / 3], 2)]).toEqual([0.03, 0.04, 0.03]);
  });

  test("a hole keeps its place and loses nothing", () => {
    expect([...roundKeepingSum([0.4, Number.NaN, 0.4, 0.4], 0)]).toEqual([0, Number.NaN, 1, 0]);
  });
});
