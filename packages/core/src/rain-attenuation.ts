import { type CoefficientTable, P838_ALPHA_H, P838_ALPHA_V, P838_K_H, P838_K_V } from "./p838-tables.ts";
import { pathLossTwoWayDb } from "./path-loss.ts";
import { zMm6PerM3 } from "./units.ts";
import type { ZrRelation } from "./zr-relation.ts";

/** A law of specific attenuation, one way: coefficient times a power. */
export interface AttenuationLaw {
  readonly coefficient: number;
  readonly exponent: number;
}

/** How a wave meets the rain. */
export interface WavePath {
  readonly elevationDeg: number;
  /** Tilt of the polarisation from the horizontal: 0 horizontal, 90 vertical, 45 circular. */
  readonly polarisationTiltDeg: number;
}

export const HORIZONTAL: WavePath = { elevationDeg: 0, polarisationTiltDeg: 0 };
export const VERTICAL: WavePath = { elevationDeg: 0, polarisationTiltDeg: 90 };

const RAD_PER_DEG = Math.PI / 180;

/**
 * Rain attenuation gamma = k R^alpha in dB/km, one way, R in mm/h.
 *
 * Source: Recommendation ITU-R P.838-3 (2005), equations 2 to 5 with Tables 1 to 4. Made for radio links: at
 * S and C band it lies about half of what a Marshall-Palmer spectrum takes in light rain, and above it at C
 * band in heavy rain. Rain only, no hail and no melting snow.
 *
 * @param frequencyGHz - 1 to 1000
 * @throws RangeError outside that range
 */
export function rainAttenuationLaw(frequencyGHz: number, path: WavePath = HORIZONTAL): AttenuationLaw {
  if (!(frequencyGHz >= 1 && frequencyGHz <= 1000)) {
    throw new RangeError(`ITU-R P.838-3 holds from 1 to 1000 GHz, got ${frequencyGHz}`);
  }
  const logF = Math.log10(frequencyGHz);
  const kH = 10 ** regression(P838_K_H, logF);
  const kV = 10 ** regression(P838_K_V, logF);
  const alphaH = regression(P838_ALPHA_H, logF);
  const alphaV = regression(P838_ALPHA_V, logF);
  const mix =
    Math.cos(path.elevationDeg * RAD_PER_DEG) ** 2 * Math.cos(2 * path.polarisationTiltDeg * RAD_PER_DEG);
  const k = (kH + kV + (kH - kV) * mix) / 2;
  return {
    coefficient: k,
    exponent: (kH * alphaH + kV * alphaV + (kH * alphaH - kV * alphaV) * mix) / (2 * k),
  };
}

function regression({ terms, slope, constant }: CoefficientTable, logF: number): number {
  return terms.reduce(
    (sum, [a, b, c]) => sum + a * Math.exp(-(((logF - b) / c) ** 2)),
    slope * logF + constant,
  );
}

/** Specific attenuation of a rain rate, dB/km ONE way; 0 for no rain, NaN stays NaN. */
export function rainAttenuationOneWayDbPerKm(rateMmPerHour: number, law: AttenuationLaw): number {
  return law.coefficient * rateMmPerHour ** law.exponent;
}

/** Loss of an echo behind even rain, dB BOTH ways: twice the specific attenuation times the length of the path. */
export function rainLossTwoWayDb(rateMmPerHour: number, pathKm: number, law: AttenuationLaw): number {
  return pathLossTwoWayDb(rainAttenuationOneWayDbPerKm(rateMmPerHour, law), pathKm);
}

/**
 * Specific attenuation by reflectivity, k = a Z^b in dB/km ONE way, Z in mm6 m-3: the law of rain rate with
 * Z = A R^b put into it.
 */
export function attenuationOfZLaw(law: AttenuationLaw, relation: ZrRelation): AttenuationLaw {
  const exponent = law.exponent / relation.b;
  return { coefficient: law.coefficient * relation.a ** -exponent, exponent };
}

/** Specific attenuation of a reflectivity, dB/km ONE way; 0 for undetect, NaN stays NaN. */
export function attenuationOfZOneWayDbPerKm(reflectivityDbz: number, law: AttenuationLaw): number {
  return law.coefficient * zMm6PerM3(reflectivityDbz) ** law.exponent;
}

/** Share of Z, 0 to 1, that a loss takes away: 3 dB take half. */
export function shareOfZLost(twoWayLossDb: number): number {
  return -Math.expm1((-twoWayLossDb * Math.LN10) / 10);
}
