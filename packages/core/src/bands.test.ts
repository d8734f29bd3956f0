import { expect, test } from "vitest";
import { bandOfWavelength } from "./bands.ts";
import { frequencyHz, SPEED_OF_LIGHT_M_PER_S, wavelengthM } from "./units.ts";

// Bands of the usual weather-radar frequencies; edges by IEEE Std 521-2002 (check values `ieee521-*`).
test.each([
  [2.8, "S"],
  [5.6, "C"],
  [9.4, "X"],
  [35, "Ka"],
  [94, "W"],
])("%d GHz is in band %s", (frequencyGHz, letter) => {
  expect(bandOfWavelength(wavelengthM(frequencyGHz * 1e9))?.letter).toBe(letter);
});

test("a shared edge belongs to the band above it; beyond the table there is none", () => {
  expect(bandOfWavelength(SPEED_OF_LIGHT_M_PER_S / 4e9)?.letter).toBe("C");
  expect(bandOfWavelength(SPEED_OF_LIGHT_M_PER_S / 0.9e9)).toBeUndefined();
  expect(bandOfWavelength(SPEED_OF_LIGHT_M_PER_S / 110e9)).toBeUndefined();
  expect(bandOfWavelength(Number.NaN)).toBeUndefined();
});

test("frequency and wavelength undo each other", () => {
  expect(frequencyHz(wavelengthM(5.6e9))).toBeCloseTo(5.6e9, 3);
});
