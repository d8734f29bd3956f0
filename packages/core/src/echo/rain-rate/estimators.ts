import { bandOfWavelength } from "../../bands.ts";
import { frequencyHz } from "../../units.ts";

/** R = coefficient KDP^exponent: mm/h from degrees per km, one way. */
export interface KdpLaw {
  readonly coefficient: number;
  readonly exponent: number;
  readonly source: string;
}

/** R = coefficient KDP^exponent 10^(perZdrDb ZDR), ZDR in dB. */
export interface KdpZdrLaw extends KdpLaw {
  readonly perZdrDb: number;
}

/** R = coefficient Z^exponent 10^(perZdrDb ZDR), Z in mm6 m-3, ZDR in dB. */
export interface ZZdrLaw {
  readonly coefficient: number;
  readonly exponent: number;
  readonly perZdrDb: number;
  readonly source: string;
}

/** R = coefficient A^exponent: mm/h from dB/km, one way. */
export interface AttenuationRateLaw {
  readonly coefficient: number;
  readonly exponent: number;
  readonly source: string;
}

const RYZHKOV_2005 = "Ryzhkov, Giangrande and Schuur (2005), J. Appl. Meteorol. 44, 502-515";
const CIFELLI_2011 =
  "Cifelli, Chandrasekar, Lim, Kennedy, Wang and Rutledge (2011), J. Atmos. Oceanic Technol. 28, 352-364";
const BRINGI_2001 = "Bringi and Chandrasekar (2001), Polarimetric Doppler Weather Radar, chapter 8";
const RYZHKOV_2014 = "Ryzhkov, Diederich, Zhang and Simmer (2014), J. Atmos. Oceanic Technol. 31, 599-619";

/**
 * Coefficients of the papers, all from memory. ZDR was linear in those of 2005: Zdr^-2.86 is 10^(-0.286 ZDR).
 */
export const RYZHKOV_2005_KDP: KdpLaw = { coefficient: 44, exponent: 0.822, source: RYZHKOV_2005 };
export const RYZHKOV_2005_KDP_ZDR: KdpZdrLaw = {
  coefficient: 136,
  exponent: 0.968,
  perZdrDb: -0.286,
  source: RYZHKOV_2005,
};
export const RYZHKOV_2005_Z_ZDR: ZZdrLaw = {
  coefficient: 0.0142,
  exponent: 0.77,
  perZdrDb: -0.167,
  source: RYZHKOV_2005,
};
export const CIFELLI_2011_KDP: KdpLaw = { coefficient: 40.5, exponent: 0.85, source: CIFELLI_2011 };
const CIFELLI_2011_KDP_ZDR: KdpZdrLaw = {
  coefficient: 90.8,
  exponent: 0.93,
  perZdrDb: -0.169,
  source: CIFELLI_2011,
};
export const CIFELLI_2011_Z_ZDR: ZZdrLaw = {
  coefficient: 6.7e-3,
  exponent: 0.927,
  perZdrDb: -0.343,
  source: CIFELLI_2011,
};

/**
 * Geometric mean of the two laws of S band: in rain of the usual drops that of 2005 makes 0.8 to 1.1 times the rain of that
 * of 2011, and nothing says which holds. House rule.
 */
export const MEAN_Z_ZDR: ZZdrLaw = {
  coefficient: Math.sqrt(RYZHKOV_2005_Z_ZDR.coefficient * CIFELLI_2011_Z_ZDR.coefficient),
  exponent: (RYZHKOV_2005_Z_ZDR.exponent + CIFELLI_2011_Z_ZDR.exponent) / 2,
  perZdrDb: (RYZHKOV_2005_Z_ZDR.perZdrDb + CIFELLI_2011_Z_ZDR.perZdrDb) / 2,
  source: `mean of ${RYZHKOV_2005} and ${CIFELLI_2011}`,
};

/** R = 129 (KDP / f)^0.85, f in GHz. From memory. Source: Bringi and Chandrasekar (2001), chapter 8. */
export function bringiKdpLaw(frequencyGHz: number): KdpLaw {
  return { coefficient: 129 * frequencyGHz ** -0.85, exponent: 0.85, source: BRINGI_2001 };
}

/** Frequency that the S-band law is taken to stand for. */
const S_BAND_GHZ = 2.8;

/**
 * R(KDP) for any wavelength: 40.5 (KDP 2.8 / f)^0.85, which at S band is the law of Cifelli et al. (2011).
 *
 * KDP grows with frequency as in {@link bringiKdpLaw}, whose own coefficient is not used: for drops of the usual
 * shape, Rayleigh-Gans scattering gives 39 to 40 % less rain than it, and 5 to 6 % less than 40.5.
 */
export function kdpLaw(frequencyGHz: number): KdpLaw {
  const { coefficient, exponent, source } = CIFELLI_2011_KDP;
  return { coefficient: coefficient * (S_BAND_GHZ / frequencyGHz) ** exponent, exponent, source };
}

/** The laws of a band. */
export interface BandLaws {
  readonly kdp: KdpLaw;
  readonly kdpZdr: KdpZdrLaw;
  readonly zZdr: ZZdrLaw;
  /** Share of R(Z, ZDR) in moderate rain, and part of R(KDP) that R(KDP, ZDR) has, where none is set. */
  readonly usualZdrShare: number;
  /** At 20 degrees C. */
  readonly attenuation: AttenuationRateLaw;
}

/** R(A) of S band in rain of 10 degrees C; the drops' temperature matters most there. From memory. */
export const RYZHKOV_2014_S_10C: AttenuationRateLaw = {
  coefficient: 3100,
  exponent: 1.03,
  source: RYZHKOV_2014,
};

/**
 * All of it at S band: it follows the size of drops, which changes R(Z) by 40 % either way from storm to storm. In
 * eight storms with known rain (one radar, loss given back) it took the error of the total from 1.0-5.4 mm to 0.8-2.8.
 * At C band, where big drops resonate, its law made 1.1 to 1.6 times the true rain from 34 dBZ up, though ZDR was well
 * freed of its loss, and has no part; X band was not tried. House rule.
 */
const ZDR_SHARE = { S: 1, others: 0 } as const;

const BY_BAND: Readonly<Record<string, Omit<BandLaws, "kdp">>> = {
  S: {
    kdpZdr: CIFELLI_2011_KDP_ZDR,
    zZdr: MEAN_Z_ZDR,
    usualZdrShare: ZDR_SHARE.S,
    attenuation: { coefficient: 4120, exponent: 1.03, source: RYZHKOV_2014 },
  },
  C: {
    kdpZdr: { coefficient: 37.9, exponent: 0.89, perZdrDb: -0.072, source: BRINGI_2001 },
    zZdr: { coefficient: 5.8e-3, exponent: 0.91, perZdrDb: -0.209, source: BRINGI_2001 },
    usualZdrShare: ZDR_SHARE.others,
    attenuation: { coefficient: 294, exponent: 0.89, source: RYZHKOV_2014 },
  },
  X: {
    kdpZdr: { coefficient: 28.6, exponent: 0.95, perZdrDb: -0.137, source: BRINGI_2001 },
    zZdr: { coefficient: 3.9e-3, exponent: 1.07, perZdrDb: -0.597, source: BRINGI_2001 },
    usualZdrShare: ZDR_SHARE.others,
    attenuation: { coefficient: 43.5, exponent: 0.79, source: RYZHKOV_2014 },
  },
};

/** @returns undefined outside S, C and X band, for which no coefficients stand here */
export function bandLaws(wavelengthM: number): BandLaws | undefined {
  const laws = BY_BAND[bandOfWavelength(wavelengthM)?.letter ?? ""];
  return laws === undefined ? undefined : { ...laws, kdp: kdpLaw(frequencyHz(wavelengthM) / 1e9) };
}

/** Rain rate of a specific differential phase; the sign is kept, so that noise has no mean. NaN stays NaN. */
export function rateOfKdp(kdpDegPerKm: number, { coefficient, exponent }: KdpLaw): number {
  return Math.sign(kdpDegPerKm) * coefficient * Math.abs(kdpDegPerKm) ** exponent;
}

/** As {@link rateOfKdp}, with the drops' mean shape told by ZDR. */
export function rateOfKdpZdr(kdpDegPerKm: number, zdrDb: number, law: KdpZdrLaw): number {
  return rateOfKdp(kdpDegPerKm, law) * 10 ** (law.perZdrDb * zdrDb);
}

/** Rain rate of reflectivity and differential reflectivity; 0 for undetect. */
export function rateOfZZdr(
  reflectivityDbz: number,
  zdrDb: number,
  { coefficient, exponent, perZdrDb }: ZZdrLaw,
): number {
  return coefficient * 10 ** ((exponent * reflectivityDbz) / 10 + perZdrDb * zdrDb);
}

/** Rain rate of a specific attenuation of 0 or more, one way. */
export function rateOfAttenuation(
  oneWayDbPerKm: number,
  { coefficient, exponent }: AttenuationRateLaw,
): number {
  return coefficient * oneWayDbPerKm ** exponent;
}
