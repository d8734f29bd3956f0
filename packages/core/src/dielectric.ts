/** |K|2 of water that radars are calibrated with by convention; Battan (1973), Doviak and Zrnic (1993). */
export const WATER_DIELECTRIC_FACTOR = 0.93;

/**
 * |K|2 of ice, by the diameter that Z is written with: of solid spheres, or of the drops they melt to.
 *
 * Source: Smith (1984), J. Clim. Appl. Meteorol. 23, 1258-1260; numbers from memory, consistent with each other.
 */
export const ICE_DIELECTRIC_FACTOR = { solidDiameters: 0.176, meltedDiameters: 0.208 } as const;

/** A complex number. Of permittivity and refractive index, the imaginary part is positive where waves are absorbed. */
export interface Complex {
  readonly re: number;
  readonly im: number;
}

/**
 * Relative permittivity of liquid water by the double Debye model.
 *
 * Source: Liebe, Hufford and Manabe (1991), Int. J. Infrared Millim. Waves 12, 659-675, with the constant
 * 3.52 of the 1993 version.
 *
 * @param frequencyGHz - up to 1000
 * @param temperatureC - about -20 (supercooled) to 40
 */
export function waterPermittivity(frequencyGHz: number, temperatureC: number): Complex {
  const theta = 300 / (temperatureC + 273.15);
  const static0 = 77.66 + 103.3 * (theta - 1);
  const middle = 0.0671 * static0;
  const high = 3.52;
  const first = 20.2 - 146.4 * (theta - 1) + 316 * (theta - 1) ** 2;
  const second = 39.8 * first;
  const byFirst = (static0 - middle) / (1 + (frequencyGHz / first) ** 2);
  const bySecond = (middle - high) / (1 + (frequencyGHz / second) ** 2);
  return {
    re: byFirst + bySecond + high,
    im: (frequencyGHz / first) * byFirst + (frequencyGHz / second) * bySecond,
  };
}

/** |K|2 of a permittivity, K = (eps - 1) / (eps + 2): how strongly small spheres of it scatter. */
export function dielectricFactor({ re, im }: Complex): number {
  return ((re - 1) ** 2 + im * im) / ((re + 2) ** 2 + im * im);
}

/**
 * What a radar calibrated for water shows of other scatterers, less their own reflectivity: dBZe - dBZ.
 *
 * @param factor - |K|2 of the scatterers, above 0
 */
export function equivalentOffsetDb(factor: number, calibratedFor = WATER_DIELECTRIC_FACTOR): number {
  return 10 * Math.log10(factor / calibratedFor);
}

/** Refractive index of a permittivity: its root with a positive real part. */
export function refractiveIndex({ re, im }: Complex): Complex {
  const size = Math.hypot(re, im);
  return { re: Math.sqrt((size + re) / 2), im: Math.sign(im) * Math.sqrt((size - re) / 2) };
}
