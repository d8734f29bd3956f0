/** Air at one place, as the attenuation of gases needs it. */
export interface Air {
  readonly temperatureK: number;
  /** Of the dry air alone: total pressure less that of the vapour. */
  readonly dryPressureHPa: number;
  readonly vapourPressureHPa: number;
}

/** Air at the ground, as people measure it. */
export interface SurfaceAir {
  readonly temperatureC: number;
  /** Total pressure, what a barometer shows at the place. */
  readonly pressureHPa: number;
  readonly vapourDensityGPerM3: number;
}

/** Mean global reference atmosphere at the ground. Source: Recommendation ITU-R P.835-6 (2017), Annex 1. */
export const REFERENCE_SURFACE: SurfaceAir = {
  temperatureC: 15,
  pressureHPa: 1013.25,
  vapourDensityGPerM3: 7.5,
};

const KELVIN = 273.15;

/** Pressure of vapour of a density, hPa: rho T / 216.7. Source: Recommendation ITU-R P.676-13, equation 4. */
export function vapourPressureHPa(vapourDensityGPerM3: number, temperatureK: number): number {
  return (vapourDensityGPerM3 * temperatureK) / 216.7;
}

/**
 * Most vapour that air can hold over water, g/m3.
 *
 * Source: Recommendation ITU-R P.453 (after Buck 1981, J. Appl. Meteorol. 20, 1527-1532), without the
 * enhancement factor.
 */
export function saturationDensityGPerM3(temperatureC: number): number {
  const pressureHPa = 6.1121 * Math.exp((17.502 * temperatureC) / (240.97 + temperatureC));
  return (216.7 * pressureHPa) / (temperatureC + KELVIN);
}

/** Air of a total pressure: the dry part is what the vapour leaves. Checks nothing. */
export function airOf(temperatureK: number, pressureHPa: number, vapourDensityGPerM3: number): Air {
  const vapour = vapourPressureHPa(vapourDensityGPerM3, temperatureK);
  return { temperatureK, dryPressureHPa: pressureHPa - vapour, vapourPressureHPa: vapour };
}

/**
 * Refuses air that cannot be.
 *
 * @throws RangeError that names temperature, pressure or vapour: air above saturation among them
 */
export function checkSurfaceAir(surface: SurfaceAir): void {
  const { temperatureC, pressureHPa, vapourDensityGPerM3 } = surface;
  if (!(temperatureC >= -60 && temperatureC <= 60))
    throw new RangeError(`the temperature must lie between -60 and 60 C, got ${temperatureC}`);
  if (!(pressureHPa >= 300 && pressureHPa <= 1100))
    throw new RangeError(`the pressure must lie between 300 and 1100 hPa, got ${pressureHPa}`);
  const most = saturationDensityGPerM3(temperatureC);
  if (!(vapourDensityGPerM3 >= 0 && vapourDensityGPerM3 <= most)) {
    throw new RangeError(
      `the vapour must lie between 0 and ${most.toFixed(2)} g/m3, where air of ${temperatureC} C is saturated, ` +
        `got ${vapourDensityGPerM3}`,
    );
  }
}

/** Height of the tropopause, and what follows from it. */
const TROPOPAUSE_KM = 11;
const LAPSE_K_PER_KM = 6.5;
/** g M / R* in K/km: how fast pressure falls with height over temperature. */
const BAROMETRIC_K_PER_KM = 34.163;
const VAPOUR_SCALE_KM = 2;

/**
 * Air above a place: temperature falls by 6.5 K/km up to 11 km and then stays, pressure follows, vapour
 * falls to 1/e in 2 km.
 *
 * Source: the mean global reference atmosphere of Recommendation ITU-R P.835-6 (2017), Annex 1, moved to
 * other values at the ground.
 *
 * @param heightM - above the place where the surface values hold, 0 to 20,000; a little below it is extrapolated
 */
export function airAbove(heightM: number, surface: SurfaceAir = REFERENCE_SURFACE): Air {
  const heightKm = heightM / 1000;
  const surfaceK = surface.temperatureC + KELVIN;
  const inTroposphereKm = Math.min(heightKm, TROPOPAUSE_KM);
  const temperatureK = surfaceK - LAPSE_K_PER_KM * inTroposphereKm;
  const atTropopause =
    surface.pressureHPa * (temperatureK / surfaceK) ** (BAROMETRIC_K_PER_KM / LAPSE_K_PER_KM);
  const pressureHPa =
    heightKm <= TROPOPAUSE_KM
      ? atTropopause
      : atTropopause * Math.exp((-BAROMETRIC_K_PER_KM * (heightKm - TROPOPAUSE_KM)) / temperatureK);
  const vapour = surface.vapourDensityGPerM3 * Math.exp(-heightKm / VAPOUR_SCALE_KM);
  return airOf(temperatureK, pressureHPa, vapour);
}
