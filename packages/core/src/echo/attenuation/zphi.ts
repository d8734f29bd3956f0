import { TWO_WAY_EXPONENT } from "./hitschfeld-bordan.ts";

/**
 * C of ZPHI, 10^(0.1 b L) - 1: once for a path.
 *
 * @param pathLossDb - two-way loss over the whole path: alpha times the rise of PHIDP
 * @param exponent - b of A = a Z^b
 */
export function zphiConstant(pathLossDb: number, exponent: number): number {
  return Math.expm1(0.1 * Math.LN10 * exponent * pathLossDb);
}

/**
 * Loss both ways along a path through rain whose phase is known at both ends, dB.
 *
 * Specific attenuation is A = Za^b C / (I(r1,r2) + C I(r,r2)), with I the integral 0.2 ln10 b Int Za^b ds; its
 * integral is closed and is what stands here. Free of the calibration of Z. Source: Testud et al. (2000), J. Atmos.
 * Oceanic Technol. 17, 332-356.
 *
 * @param share - part of the path's integral of Za^b that lies before the place, 0 to 1
 * @param constant - from {@link zphiConstant}
 */
export function zphiLossTwoWayDb(share: number, constant: number, exponent: number): number {
  // I(r,r2) = (1 - share) I: the loss up to r is (10/b) log10((1 + C) / (1 + C (1 - share))).
  return (10 / exponent) * Math.log10((1 + constant) / (1 + constant * (1 - share)));
}

/**
 * Specific attenuation by ZPHI, dB/km ONE way. Parameters as in {@link zphiLossTwoWayDb}.
 *
 * @param zToB - attenuated Z (mm6 m-3) to the power b at the place
 * @param pathZToBKm - integral of it over the path, times km
 */
export function zphiAttenuationOneWayDbPerKm(
  zToB: number,
  pathZToBKm: number,
  share: number,
  constant: number,
  exponent: number,
): number {
  return (zToB * constant) / (TWO_WAY_EXPONENT * exponent * pathZToBKm * (1 + constant * (1 - share)));
}
