import { describe, expect, test } from "vitest";
import { effectiveRadiusM } from "../../beam.ts";
import { gasLossTwoWayDb } from "../../gas-loss.ts";
import { echoOf } from "../blockage/echo-fixture.ts";
import { correctGas, GasLosses, referenceAirAt, surfaceAirOf } from "./correct-gas.ts";

function cBand(wavelengthM: number | undefined = 0.0535) {
  return echoOf({
    elevationDeg: 0.5,
    rayCount: 4,
    gateCount: 100,
    ...(wavelengthM === undefined ? {} : { wavelengthM }),
    dbz: (_, gate) => (gate === 0 ? Number.NaN : gate === 1 ? Number.NEGATIVE_INFINITY : 20),
  });
}

describe("loss by gas", () => {
  test("is that of the path to each gate's centre, on every ray", () => {
    const echo = cBand();
    expect(correctGas(echo, new GasLosses(), "on").corrected).toBe(true);
    const expected = gasLossTwoWayDb(
      [500, 99_500],
      299_792_458 / 0.0535 / 1e9,
      0.5,
      effectiveRadiusM(),
      referenceAirAt(100),
    );
    for (const ray of [0, 3]) {
      expect(echo.twoWayLossDb![ray * 100 + 99]).toBeCloseTo(expected[1] as number, 4);
      expect(echo.dbz[ray * 100 + 99]).toBeCloseTo(20 + (expected[1] as number), 4);
    }
    // About 0.008 dB/km one way at 5.6 GHz near the ground: 1 to 1.6 dB over 100 km and back (common practice).
    expect(expected[1]).toBeGreaterThan(1);
    expect(expected[1]).toBeLessThan(1.7);
    expect([...echo.dbz.subarray(0, 2)]).toEqual([Number.NaN, Number.NEGATIVE_INFINITY]);
    expect(echo.effectsDb.get("gas")).toBeDefined();
  });

  test.each([
    ["auto", false, true, undefined],
    ["auto", true, false, "the sender has corrected it"],
    ["auto", undefined, false, "the file does not say whether the sender has corrected it"],
    ["on", undefined, true, undefined],
    ["off", false, false, "switched off"],
  ] as const)("mode %s where the file says %s", (mode, already, corrected, reason) => {
    const echo = cBand();
    const report = correctGas(echo, new GasLosses(), mode, already);
    expect(report.corrected).toBe(corrected);
    expect(report.reason).toBe(reason);
    expect(echo.effectsDb.has("gas")).toBe(corrected);
  });

  test("needs the wavelength", () => {
    const echo = echoOf({ elevationDeg: 0.5, dbz: () => 20 });
    expect(correctGas(echo, new GasLosses(), "on")).toMatchObject({
      corrected: false,
      reason: "the wavelength is not known",
    });
  });

  test("a geometry is worked out once", () => {
    const losses = new GasLosses();
    const { header } = cBand();
    expect(losses.lossDb(header, 0.0535)).toBe(losses.lossDb({ ...header }, 0.0535));
    expect(losses.lossDb({ ...header, elevationDeg: 5 }, 0.0535)).not.toBe(losses.lossDb(header, 0.0535));
  });
});

describe("air of a station", () => {
  const sound = { temperatureC: 20, pressureHPa: 1000, relativeHumidityPercent: 50 };

  test("half of the vapour that saturates 20 C: 8.65 g/m3 (Buck 1981: 23.37 hPa, 17.3 g/m3)", () => {
    expect(surfaceAirOf(sound).vapourDensityGPerM3).toBeCloseTo(8.64, 1);
  });

  test.each([
    [{ relativeHumidityPercent: 130 }, "the relative humidity must lie between 0 and 100 %, got 130"],
    [{ relativeHumidityPercent: -1 }, "the relative humidity must lie between 0 and 100 %, got -1"],
    [{ relativeHumidityPercent: Number.NaN }, "the relative humidity must lie between 0 and 100 %, got NaN"],
    [{ temperatureC: 99 }, "the temperature must lie between -60 and 60 C, got 99"],
    [{ pressureHPa: 20 }, "the pressure must lie between 300 and 1100 hPa, got 20"],
  ])("%j is refused", (wrong, message) => {
    expect(() => surfaceAirOf({ ...sound, ...wrong })).toThrow(new RangeError(message));
  });

  test("vapour beyond saturation is refused", () => {
    expect(() => new GasLosses({ temperatureC: 0, pressureHPa: 1000, vapourDensityGPerM3: 20 })).toThrow(
      RangeError,
    );
  });

  test("the reference air of a site is that of the ground at 0 m, and colder and thinner at 2000 m (ITU-R P.835: 2 C, 795 hPa)", () => {
    expect(referenceAirAt(0)).toMatchObject({
      temperatureC: expect.closeTo(15, 6),
      pressureHPa: expect.closeTo(1013.25, 6),
      vapourDensityGPerM3: expect.closeTo(7.5, 6),
    });
    const high = referenceAirAt(2000);
    expect(high.temperatureC).toBeCloseTo(2, 6);
    expect(high.pressureHPa).toBeCloseTo(795, 0);
    expect(high.vapourDensityGPerM3).toBeCloseTo(7.5 / Math.E, 6);
  });
});
