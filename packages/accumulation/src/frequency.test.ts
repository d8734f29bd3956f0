import type { ArealReductionTable, FrequencyTable } from "@rainreckon/core";
import fc from "fast-check";
import { expect, test } from "vitest";
import {
  annualFromPartial,
  arealReduction,
  depthsAtDuration,
  frequencyDepthMm,
  inSeries,
  partialFromAnnual,
  returnPeriod,
} from "./frequency.ts";

const TABLE: FrequencyTable = {
  series: "AMS",
  kind: "point",
  source: "invented",
  edition: "1",
  durationsMin: [10, 40],
  periodsYears: [2, 10, 100],
  depthMm: [
    [10, 16, 25],
    [20, 32, 50],
  ],
  lowMm: [
    [9, 13, 17],
    [18, 26, 34],
  ],
};

test("log-log in duration: twice the time has the square root of the fourfold's ratio", () => {
  // From 10 to 40 minutes the depths double; half way in logarithms is 20 minutes and a factor of the root of 2.
  expect(depthsAtDuration(TABLE, 20)?.map((mm) => mm / Math.SQRT2)).toEqual([
    expect.closeTo(10, 12),
    expect.closeTo(16, 12),
    expect.closeTo(25, 12),
  ]);
});

test("outside the table nothing is extrapolated", () => {
  expect(returnPeriod(TABLE, 10, 9.99)).toEqual({ years: 2, is: "below" });
  expect(returnPeriod(TABLE, 10, 25.01)).toEqual({ years: 100, is: "above" });
  expect(returnPeriod(TABLE, 10, 25)).toEqual({ years: 100, is: "at" });
  expect(returnPeriod(TABLE, 5, 12)).toBeUndefined();
  expect(returnPeriod(TABLE, 41, 12)).toBeUndefined();
  expect(returnPeriod(TABLE, 10, Number.NaN)).toBeUndefined();
  expect(frequencyDepthMm(TABLE, 10, 1.5)).toBeNaN();
  expect(frequencyDepthMm(TABLE, 10, 200)).toBeNaN();
});

test("a partial-duration series is linear in the logarithm of the period", () => {
  // 13 mm is half way from 10 to 16: the geometric mean of 2 and 10 years.
  expect(returnPeriod({ ...TABLE, series: "PDS" }, 10, 13)?.years).toBeCloseTo(Math.sqrt(20), 12);
  // Of annual maxima: half way from y = 0.36651 to 2.25037 is 1.30844, and 1 / (1 - exp(-exp(-1.30844))) is 4.223.
  expect(returnPeriod(TABLE, 10, 13)?.years).toBeCloseTo(4.223, 3);
});

test("the table's own lower end makes a depth rarer; an end that it lacks tells nothing", () => {
  expect(returnPeriod(TABLE, 10, 13, 1, "lowMm")).toEqual({ years: 10, is: "at" });
  expect(returnPeriod(TABLE, 10, 13, 1, "highMm")).toBeUndefined();
});

test("an areal mean meets the point's depth times its reduction", () => {
  expect(returnPeriod(TABLE, 10, 12.8, 0.8)?.years).toBeCloseTo(10, 9);
});

test("a depth taken from the table for a period has that period", () => {
  fc.assert(
    fc.property(
      fc.double({ min: 10, max: 40, noNaN: true }),
      fc.double({ min: 2, max: 100, noNaN: true }),
      fc.constantFrom("AMS" as const, "PDS" as const),
      (minutes, years, series) => {
        const table = { ...TABLE, series };
        const found = returnPeriod(table, minutes, frequencyDepthMm(table, minutes, years) * (1 + 1e-15));
        expect((found?.years ?? 0) / years).toBeCloseTo(1, 6);
      },
    ),
    { seed: 7, numRuns: 200 },
  );
});

test("Langbein's relation has an inverse, and knows nothing of a table that does not say its series", () => {
  // 1 / (1 - exp(-1/2)) = 2.541 (Langbein 1949).
  expect(inSeries({ years: 2, is: "at" }, "PDS", "AMS").years).toBeCloseTo(2.5415, 4);
  expect(partialFromAnnual(annualFromPartial(7))).toBeCloseTo(7, 12);
  expect(inSeries({ years: 2, is: "below" }, "AMS", "PDS")).toEqual({
    years: expect.closeTo(1 / Math.LN2, 12),
    is: "below",
  });
  expect(inSeries({ years: 2, is: "at" }, "unknown", "PDS").years).toBe(2);
});

test("areal reduction lies between its entries, and nowhere outside them", () => {
  const table: ArealReductionTable = {
    source: "invented",
    durationsMin: [60, 240],
    areasKm2: [1, 100],
    factor: [
      [1, 0.8],
      [1, 0.9],
    ],
  };
  expect(arealReduction(table, 60, 100)).toBe(0.8);
  expect(arealReduction(table, 60, 10)).toBeCloseTo(0.9, 12);
  expect(arealReduction(table, 120, 10)).toBeCloseTo(0.925, 12);
  expect(arealReduction(table, 60, 0.5)).toBeUndefined();
  expect(arealReduction(table, 300, 10)).toBeUndefined();
});
