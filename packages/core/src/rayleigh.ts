import { bandOfWavelength } from "./bands.ts";

/** Largest drops of ordinary rain; common practice, hail and rare giant drops aside. */
export const LARGEST_RAIN_DROP_MM = 6;

/**
 * Largest drop that scatters as the radar equation takes for granted: diameter up to a 16th of the wavelength.
 *
 * Common practice; Battan (1973), Doviak and Zrnic (1993).
 */
export function rayleighLimitMm(wavelengthM: number): number {
  return (1000 * wavelengthM) / 16;
}

/** One sentence where drops of ordinary rain lie beyond the Rayleigh limit; undefined where they do not. */
export function rayleighCaution(wavelengthM: number): string | undefined {
  const limitMm = rayleighLimitMm(wavelengthM);
  if (limitMm >= LARGEST_RAIN_DROP_MM) return undefined;
  const band = bandOfWavelength(wavelengthM);
  const at = band === undefined ? `${(100 * wavelengthM).toFixed(2)} cm` : `${band.letter} band`;
  return (
    `at ${at} drops above ${limitMm.toFixed(1)} mm scatter otherwise than Z says (Rayleigh limit, a 16th of ` +
    "the wavelength): in heavy rain Z is not the sixth moment of the drops"
  );
}
