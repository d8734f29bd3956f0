import { expect, test } from "vitest";
import { airAbove, checkSurfaceAir, REFERENCE_SURFACE } from "./atmosphere.ts";
import { effectiveRadiusM } from "./beam.ts";
import { gasAttenuationOneWay } from "./gas-attenuation.ts";
import { gasLossTwoWayDb } from "./gas-loss.ts";
import { pathLossTwoWayDb } from "./path-loss.ts";
import { rainAttenuationLaw } from "./rain-attenuation.ts";

// U.S. Standard Atmosphere (1976), which ITU-R P.835 follows: 540.2 hPa and 255.65 K at 5 km, 226.32 hPa and
// 216.65 K at 11 km, 120.45 hPa and 216.65 K at 15 km (geopotential heights).
test.each([
  [5000, 255.65, 540.2],
  [11_000, 216.65, 226.32],
  [15_000, 216.65, 120.45],
])("air %d m above the sea", (heightM, temperatureK, pressureHPa) => {
  const air = airAbove(heightM, { ...REFERENCE_SURFACE, vapourDensityGPerM3: 0 });
  expect(air.temperatureK).toBeCloseTo(temperatureK, 6);
  expect(Math.abs(air.dryPressureHPa / pressureHPa - 1)).toBeLessThan(3e-4);
  expect(air.vapourPressureHPa).toBe(0);
});

test.each([
  [{ vapourDensityGPerM3: 12.9 }, /saturated/],
  [{ vapourDensityGPerM3: -1 }, /saturated/],
  [{ temperatureC: 80 }, /temperature/],
  [{ pressureHPa: 1e5 }, /pressure/],
  [{ temperatureC: -10 }, /saturated/],
])("air that cannot be: %j", (change, words) => {
  expect(() => checkSurfaceAir({ ...REFERENCE_SURFACE, ...change })).toThrow(words);
});

test("frequencies outside the recommendations are refused, not extrapolated", () => {
  for (const frequencyGHz of [0.5, 1001, Number.NaN]) {
    expect(() => gasAttenuationOneWay(frequencyGHz, airAbove(0))).toThrow(RangeError);
    expect(() => rainAttenuationLaw(frequencyGHz)).toThrow(RangeError);
  }
});

test("the loss along a beam adds up, and at the horizon it starts as the loss at the ground", () => {
  const radiusM = effectiveRadiusM();
  const [near, far] = gasLossTwoWayDb([100, 50_000], 9.4, 0.5, radiusM);
  const [alone] = gasLossTwoWayDb([50_000], 9.4, 0.5, radiusM);
  expect(Math.abs(far - alone)).toBeLessThan(1e-5);
  const ground = pathLossTwoWayDb(gasAttenuationOneWay(9.4, airAbove(0)).totalDbPerKm, 0.1);
  expect(Math.abs(near / ground - 1)).toBeLessThan(1e-3);
  expect(gasLossTwoWayDb([0], 9.4, 0.5, radiusM)[0]).toBe(0);
  expect(() => gasLossTwoWayDb([2000, 1000], 9.4, 0.5, radiusM)).toThrow(/ascend/);
});
