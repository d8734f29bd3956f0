import { decibels, ratioFromDecibels } from "./units.ts";

const RAD_PER_DEG = Math.PI / 180;

/** Half-power width of a tapered dish in wavelengths over diameters, radians; Doviak and Zrnic (1993), from memory. */
const TAPERED_DISH = 1.27;

/**
 * Gain of an antenna from its half-power beam widths: G = pi2 k2 / (theta phi), radians.
 *
 * Source: Probert-Jones (1962), Q. J. R. Meteorol. Soc. 88, 485-495. Real dishes lie 0.5 to 1.5 dB below.
 *
 * @param efficiency - k2, about 1
 * @returns dB over an isotropic antenna; 45.1 dB for 1 by 1 degree
 */
export function antennaGainDb(
  beamWidthDeg: { readonly horizontal: number; readonly vertical: number },
  efficiency = 1,
): number {
  const beamRad2 = beamWidthDeg.horizontal * beamWidthDeg.vertical * RAD_PER_DEG ** 2;
  return decibels((Math.PI ** 2 * efficiency) / beamRad2);
}

/** Width in degrees of a round beam that {@link antennaGainDb} gives a gain. */
export function beamWidthOfGainDeg(gainDb: number, efficiency = 1): number {
  return (Math.PI * Math.sqrt(efficiency / ratioFromDecibels(gainDb))) / RAD_PER_DEG;
}

/**
 * Half-power beam width of a dish: 1.27 lambda / D radians for the usual tapered illumination.
 *
 * Source: Doviak and Zrnic (1993), Doppler Radar and Weather Observations; coefficient from memory. The rule
 * of thumb 70 lambda / D degrees is 4 % narrower.
 */
export function beamWidthOfDishDeg(dishDiameterM: number, wavelengthM: number): number {
  return (TAPERED_DISH * wavelengthM) / dishDiameterM / RAD_PER_DEG;
}

/** Gain of an ideal, lossless Gaussian beam without side lobes: 16 ln2 / (theta phi), the most a beam can have. */
export function gaussianBeamGainDb(beamWidthDeg: {
  readonly horizontal: number;
  readonly vertical: number;
}): number {
  return antennaGainDb(beamWidthDeg, (16 * Math.LN2) / Math.PI ** 2);
}

/**
 * Power of a Gaussian beam off its axis, dB below that on it.
 *
 * Source: Probert-Jones (1962): exp(-4 ln2 (x / theta)2) one way; an echo goes through it twice.
 *
 * @param offAxis - angle off the axis over the half-power width: 0.5 gives -3 dB one way
 */
export function beamPatternDb(offAxis: number, path: "one-way" | "two-way"): number {
  return (path === "one-way" ? 1 : 2) * decibels(Math.exp(-4 * Math.LN2 * offAxis * offAxis));
}

/** Half-power width of the two-way pattern over that of the one-way pattern: 1 / sqrt 2 for a Gaussian beam. */
export const TWO_WAY_WIDTH_RATIO = Math.SQRT1_2;
