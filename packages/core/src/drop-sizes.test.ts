import { expect, test } from "vitest";
import { rateFactorOfErrorDb } from "./calibration-error.ts";
import {
  diameterAtShareMm,
  dropSpectrum,
  marshallPalmerSpectrum,
  shareBelow,
  spectrumRateMmPerHour,
  spectrumZMm6PerM3,
} from "./drop-sizes.ts";
import { measuredFallSpeedMPerS } from "./fall-speed.ts";
import { gamma, lowerGammaShare } from "./gamma-function.ts";
import { mieEfficiency } from "./mie.ts";
import { shareOfZLost } from "./rain-attenuation.ts";
import { rayleighCaution } from "./rayleigh.ts";
import { findRelation } from "./relations.ts";
import { dropClasses } from "./spectrum-scattering.ts";

test.each([
  [-1, 0, 4],
  [8000, -4, 4],
  [8000, 0, 0],
  [8000, Number.NaN, 4],
  [Number.POSITIVE_INFINITY, 0, 4],
])("N0 %d, mu %d, Lambda %d is no spectrum", (n0, mu, lambda) => {
  expect(() => dropSpectrum(n0, mu, lambda)).toThrow(RangeError);
});

// Factorials; gamma of a half is the root of pi; P(1, x) = 1 - exp(-x); P(2, x) = 1 - (1 + x) exp(-x).
test("gamma functions in closed form", () => {
  for (const [x, value] of [
    [1, 1],
    [5, 24],
    [11, 3_628_800],
    [0.5, Math.sqrt(Math.PI)],
    [21, 2.43290200817664e18],
  ]) {
    expect(Math.abs(gamma(x) / value - 1)).toBeLessThan(1e-12);
  }
  for (const x of [0.01, 0.7, 1.9, 2.1, 5, 30]) {
    expect(lowerGammaShare(1, x)).toBeCloseTo(-Math.expm1(-x), 13);
    expect(lowerGammaShare(2, x)).toBeCloseTo(1 - (1 + x) * Math.exp(-x), 13);
  }
  expect(lowerGammaShare(7, 0)).toBe(0);
  expect(lowerGammaShare(7, Number.POSITIVE_INFINITY)).toBe(1);
});

test("a few large drops rule Z: half of it comes from drops far larger than those that carry the rain", () => {
  const spectrum = marshallPalmerSpectrum(20);
  const byZ = diameterAtShareMm(spectrum, 6, 0.5);
  const byRain = diameterAtShareMm(spectrum, 3.67, 0.5);
  // Medians of gamma distributions of shape a lie near a - 1/3 (Choi 1994): 6.67 and 4.34 over Lambda.
  expect(Math.abs(byZ * spectrum.lambdaPerMm - 6.67)).toBeLessThan(0.01);
  expect(Math.abs(byRain * spectrum.lambdaPerMm - 4.337)).toBeLessThan(0.01);
  expect(shareBelow(spectrum, 6, byZ)).toBeCloseTo(0.5, 12);
});

test("classes add up to the closed forms, and at long waves the radar shows the sixth moment", () => {
  const spectrum = marshallPalmerSpectrum(10);
  const classes = dropClasses(spectrum, {
    wavelengthM: 1,
    temperatureC: 10,
    classWidthMm: 0.05,
    maxDiameterMm: 12,
  });
  const sum = (of: (one: (typeof classes)[number]) => number) =>
    classes.reduce((total, one) => total + of(one), 0);
  const z = spectrumZMm6PerM3(spectrum);
  expect(Math.abs(sum((one) => one.zMm6PerM3) / z - 1)).toBeLessThan(1e-3);
  expect(Math.abs(sum((one) => one.equivalentZMm6PerM3) / z - 1)).toBeLessThan(5e-3);
  // The table and the power law differ by up to 15 % for single drops, by a few per cent over a spectrum.
  const rate = sum((one) => one.rainRateMmPerHour);
  expect(Math.abs(rate / spectrumRateMmPerHour(spectrum) - 1)).toBeLessThan(0.08);
});

// Bohren and Huffman (1983), section 4.4.3: extinction of large spheres tends to 2 (they take what they hide, and
// as much again by diffraction).
test("a sphere much larger than the wave takes twice its shadow", () => {
  const { extinction } = mieEfficiency(400, { re: 1.33, im: 0.1 });
  expect(Math.abs(extinction - 2)).toBeLessThan(0.05);
});

test("speed between entries of the table lies on a straight line, and is held above the last", () => {
  expect(measuredFallSpeedMPerS(1.1)).toBeCloseTo((4.03 + 4.64) / 2, 12);
  expect(measuredFallSpeedMPerS(0.05)).toBeCloseTo(0.135, 12);
  expect(measuredFallSpeedMPerS(0)).toBe(0);
  expect(measuredFallSpeedMPerS(8)).toBe(9.17);
});

test("10 dB take nine tenths of Z, no loss takes none", () => {
  expect(shareOfZLost(10)).toBeCloseTo(0.9, 12);
  expect(shareOfZLost(0)).toBe(0);
});

// The reference book, section c: +1 dB is 10^(0.1/b), 1.155 for b = 1.6 and 1.179 for b = 1.4.
test.each([
  ["marshall-1955-200/1.6", 1.155],
  ["fulton-1998-300/1.4", 1.179],
])("one dB in %s", (name, factor) => {
  expect(Math.abs(rateFactorOfErrorDb(1, findRelation(name)) - factor)).toBeLessThan(5e-4);
});

test("S band holds ordinary rain within the Rayleigh limit, C and X do not", () => {
  expect(rayleighCaution(0.107)).toBeUndefined();
  expect(rayleighCaution(0.0535)).toContain("C band drops above 3.3 mm");
  expect(rayleighCaution(0.0319)).toContain("X band drops above 2.0 mm");
  expect(rayleighCaution(0.002)).toContain("0.20 cm");
});
