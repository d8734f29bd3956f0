import { expect, test } from "vitest";
import { antennaGainDb, beamWidthOfGainDeg } from "./antenna.ts";
import { effectiveVolumeM3, rangeResolutionM } from "./pulse.ts";
import {
  type RadarSystem,
  radarConstantDb,
  receivedPowerDbm,
  reflectivityOfPowerDbz,
} from "./radar-equation.ts";
import { detectableDbz, smallestVisibleDropMm } from "./sensitivity.ts";
import { decibels, ratioFromDecibels } from "./units.ts";

const SYSTEM: RadarSystem = {
  peakPowerW: 250_000,
  antennaGainDb: 45,
  beamWidthDeg: { horizontal: 1, vertical: 1 },
  pulseLengthS: 2e-6,
  wavelengthM: 0.0535,
  systemLossDb: 2,
  dielectricFactor: 0.93,
};

test.each([
  [{ peakPowerW: -1 }, /peak power/],
  [{ peakPowerW: Number.NaN }, /peak power/],
  [{ beamWidthDeg: { horizontal: 0, vertical: 1 } }, /horizontal beam width/],
  [{ beamWidthDeg: { horizontal: 1, vertical: 0 } }, /vertical beam width/],
  [{ pulseLengthS: 0 }, /pulse length/],
  [{ wavelengthM: Number.POSITIVE_INFINITY }, /wavelength/],
  [{ dielectricFactor: 0 }, /dielectric factor/],
  [{ systemLossDb: -1 }, /system loss/],
  [{ antennaGainDb: Number.NaN }, /antenna gain/],
])("%j is refused by name", (change, name) => {
  expect(() => radarConstantDb({ ...SYSTEM, ...change })).toThrow(name);
});

test("a loss on the way takes power, and is given back", () => {
  const constantDb = radarConstantDb(SYSTEM);
  const clear = receivedPowerDbm(40, 80_000, constantDb);
  const behindRain = receivedPowerDbm(40, 80_000, constantDb, 7);
  expect(clear - behindRain).toBeCloseTo(7, 12);
  expect(reflectivityOfPowerDbz(behindRain, 80_000, constantDb, 7)).toBeCloseTo(40, 12);
  expect(receivedPowerDbm(Number.NEGATIVE_INFINITY, 80_000, constantDb)).toBe(Number.NEGATIVE_INFINITY);
});

test("width and gain undo each other", () => {
  for (const widthDeg of [0.5, 1, 2.3]) {
    const gainDb = antennaGainDb({ horizontal: widthDeg, vertical: widthDeg }, 0.8);
    expect(beamWidthOfGainDeg(gainDb, 0.8)).toBeCloseTo(widthDeg, 12);
  }
});

// The point-target radar equation, as any radar textbook has it: Pr = Pt G2 lambda2 sigma / ((4 pi)3 r4 L),
// with the Rayleigh cross-section sigma = pi5 |K|2 D6 / lambda4. Written out here, term by term.
test("the smallest visible drop returns just the smallest visible power", () => {
  const constantDb = radarConstantDb(SYSTEM);
  for (const rangeM of [1000, 20_000, 150_000]) {
    const signalDbm = -108;
    const at1Km = signalDbm + constantDb;
    const volume = effectiveVolumeM3(rangeM, SYSTEM.beamWidthDeg, rangeResolutionM(SYSTEM.pulseLengthS));
    const diameterM = smallestVisibleDropMm(detectableDbz(rangeM, at1Km), volume) / 1000;
    const sigma = (Math.PI ** 5 * SYSTEM.dielectricFactor * diameterM ** 6) / SYSTEM.wavelengthM ** 4;
    const gain = ratioFromDecibels(SYSTEM.antennaGainDb);
    const powerW =
      (SYSTEM.peakPowerW * gain ** 2 * SYSTEM.wavelengthM ** 2 * sigma) /
      ((4 * Math.PI) ** 3 * rangeM ** 4 * ratioFromDecibels(SYSTEM.systemLossDb));
    expect(decibels(1000 * powerW)).toBeCloseTo(signalDbm, 9);
  }
});
