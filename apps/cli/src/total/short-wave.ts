import { bandOfWavelength, frequencyHz, rainAttenuationLaw, rainLossTwoWayDb } from "@rainreckon/core";

/** Bands whose waves rain takes up within a few kilometres, so that echo behind it is no measure of rain. */
const UNFIT_BANDS = ["Ku", "K", "Ka", "V", "W"];
const EXAMPLE_RATE_MM_PER_HOUR = 10;
const EXAMPLE_PATH_KM = 10;

/** Why a radar of a wavelength is unfit for totals; undefined where it is not. */
export function shortWaveReason(wavelengthM: number): string | undefined {
  const band = bandOfWavelength(wavelengthM)?.letter;
  if (band === undefined || !UNFIT_BANDS.includes(band)) return undefined;
  const law = rainAttenuationLaw(frequencyHz(wavelengthM) / 1e9);
  const lossDb = rainLossTwoWayDb(EXAMPLE_RATE_MM_PER_HOUR, EXAMPLE_PATH_KM, law);
  return (
    `at a wavelength of ${(100 * wavelengthM).toFixed(2)} cm (${band} band) ${EXAMPLE_PATH_KM} km of ` +
    `${EXAMPLE_RATE_MM_PER_HOUR} mm/h take ${lossDb.toFixed(0)} dB from the echo behind them: no total can be made of that`
  );
}
