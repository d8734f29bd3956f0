import { expect, test } from "vitest";
import { decibels, ratioFromDecibels, zMm6PerM3 } from "./units.ts";

test("decibels: ten times is 10 dB, and both directions agree", () => {
  expect(decibels(10)).toBe(10);
  expect(ratioFromDecibels(-20)).toBeCloseTo(0.01, 15);
  for (let db = -60; db <= 80; db += 0.7) expect(decibels(ratioFromDecibels(db))).toBeCloseTo(db, 10);
});

test("undetect is no echo at all, nodata stays unknown", () => {
  expect(zMm6PerM3(Number.NEGATIVE_INFINITY)).toBe(0);
  expect(zMm6PerM3(Number.NaN)).toBeNaN();
});
