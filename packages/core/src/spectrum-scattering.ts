import { type DropSpectrum, RAIN_RATE_PER_D3, zOfEqualDropsMm6PerM3 } from "./drop-sizes.ts";
import { measuredFallSpeedMPerS } from "./fall-speed.ts";
import { scatteringOfDrop } from "./mie.ts";
import { ratioFromDecibels } from "./units.ts";

/** dB of one neper of power: 10 log10 e. */
export const DB_PER_NEPER = 10 * Math.LOG10E;

/** One class of drop sizes of a spectrum, and its part of what the radar and the ground receive. */
export interface DropClass {
  /** Middle of the class. */
  readonly diameterMm: number;
  readonly countPerM3: number;
  readonly zMm6PerM3: number;
  /** Z that the radar would show: each drop by the Mie series instead of the Rayleigh law. */
  readonly equivalentZMm6PerM3: number;
  readonly rainRateMmPerHour: number;
  readonly attenuationOneWayDbPerKm: number;
}

/** How a spectrum is cut into classes. */
export interface ClassSettings {
  readonly wavelengthM: number;
  readonly temperatureC: number;
  readonly classWidthMm: number;
  readonly maxDiameterMm: number;
}

/**
 * A spectrum cut into classes of equal width, each with its Z, rain rate and attenuation: which drops carry
 * what. Sums over the classes are those of the spectrum, truncated.
 *
 * Fall speeds are those of Gunn and Kinzer (1949); scattering is that of spheres by the Mie series.
 *
 * @returns ascending diameters; a last, narrower class is left out
 */
export function dropClasses(spectrum: DropSpectrum, settings: ClassSettings): readonly DropClass[] {
  const { wavelengthM, temperatureC, classWidthMm, maxDiameterMm } = settings;
  const count = Math.floor(maxDiameterMm / classWidthMm + 1e-9);
  return Array.from({ length: count }, (_, k) => {
    const diameterMm = (k + 0.5) * classWidthMm;
    const density = spectrum.n0 * diameterMm ** spectrum.mu * Math.exp(-spectrum.lambdaPerMm * diameterMm);
    const countPerM3 = density * classWidthMm;
    const { extinctionM2, mieOverRayleighDb } = scatteringOfDrop(diameterMm, wavelengthM, temperatureC);
    const zMm6PerM3 = zOfEqualDropsMm6PerM3(countPerM3, diameterMm);
    return {
      diameterMm,
      countPerM3,
      zMm6PerM3,
      equivalentZMm6PerM3: zMm6PerM3 * ratioFromDecibels(mieOverRayleighDb),
      rainRateMmPerHour: RAIN_RATE_PER_D3 * countPerM3 * diameterMm ** 3 * measuredFallSpeedMPerS(diameterMm),
      attenuationOneWayDbPerKm: 1000 * DB_PER_NEPER * countPerM3 * extinctionM2,
    };
  });
}
