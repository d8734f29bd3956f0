import { frequencyHz } from "./units.ts";

/** A radar band and its edges in GHz. */
export interface RadarBand {
  readonly letter: string;
  readonly lowGHz: number;
  readonly highGHz: number;
}

/**
 * Radar bands from 1 GHz up, by ascending frequency.
 *
 * Source: IEEE Std 521-2002, Standard Letter Designations for Radar-Frequency Bands.
 */
export const RADAR_BANDS: readonly RadarBand[] = [
  { letter: "L", lowGHz: 1, highGHz: 2 },
  { letter: "S", lowGHz: 2, highGHz: 4 },
  { letter: "C", lowGHz: 4, highGHz: 8 },
  { letter: "X", lowGHz: 8, highGHz: 12 },
  { letter: "Ku", lowGHz: 12, highGHz: 18 },
  { letter: "K", lowGHz: 18, highGHz: 27 },
  { letter: "Ka", lowGHz: 27, highGHz: 40 },
  { letter: "V", lowGHz: 40, highGHz: 75 },
  { letter: "W", lowGHz: 75, highGHz: 110 },
];

/**
 * The band that a wavelength lies in.
 *
 * The standard lets neighbouring bands share an edge; here the edge belongs to the band above it.
 *
 * @param wavelengthM - above 0
 * @returns undefined outside 1 to 110 GHz, and for NaN
 */
export function bandOfWavelength(wavelengthM: number): RadarBand | undefined {
  const frequencyGHz = frequencyHz(wavelengthM) / 1e9;
  return RADAR_BANDS.find(({ lowGHz, highGHz }) => frequencyGHz >= lowGHz && frequencyGHz < highGHz);
}
