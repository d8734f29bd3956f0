import { expect, test } from "vitest";
import {
  blockageAlongRay,
  blockageCorrectionDb,
  gaussianBlockedFraction,
  uniformBlockedFraction,
} from "./blockage.ts";

test("what lies above the edge is what lies below it turned over", () => {
  for (let y = -1.5; y <= 1.5; y += 0.1) {
    expect(uniformBlockedFraction(y, 1) + uniformBlockedFraction(-y, 1)).toBeCloseTo(1, 12);
    for (const path of ["one-way", "two-way"] as const) {
      expect(gaussianBlockedFraction(y, 1, path) + gaussianBlockedFraction(-y, 1, path)).toBeCloseTo(1, 12);
    }
  }
});

test("the uniform share is the share of points of a disc that lie below the edge", () => {
  // Counting points is a route of its own to the area; 400 by 400 points are good to about 0.002.
  const share = (edge: number) => {
    let inside = 0;
    let below = 0;
    for (let i = 0; i < 400; i++) {
      for (let j = 0; j < 400; j++) {
        const x = (i + 0.5) / 200 - 1;
        const y = (j + 0.5) / 200 - 1;
        if (x * x + y * y > 1) continue;
        inside += 1;
        if (y < edge) below += 1;
      }
    }
    return below / inside;
  };
  for (const edge of [-0.8, -0.3, 0, 0.37, 0.95]) {
    expect(Math.abs(uniformBlockedFraction(500 * edge, 500) - share(edge))).toBeLessThan(0.003);
  }
});

test("outside the beam nothing or all is hidden; what is not known stays unknown", () => {
  expect(uniformBlockedFraction(-2000, 500)).toBe(0);
  expect(uniformBlockedFraction(2000, 500)).toBe(1);
  expect(uniformBlockedFraction(Number.NaN, 500)).toBeNaN();
  expect(gaussianBlockedFraction(Number.NaN, 500, "two-way")).toBeNaN();
});

test("blockage never gets less behind an obstacle, and unknown terrain says nothing", () => {
  const fraction = Float64Array.from([Number.NaN, 0, 0.3, 0.1, Number.NaN, 0.2, 0.6, 0]);
  expect([...blockageAlongRay(fraction)]).toEqual([Number.NaN, 0, 0.3, 0.3, 0.3, 0.3, 0.6, 0.6]);
});

test("nothing hidden needs no correction, all hidden has none", () => {
  expect(blockageCorrectionDb(0)).toBe(0);
  expect(blockageCorrectionDb(1)).toBe(Number.POSITIVE_INFINITY);
});
