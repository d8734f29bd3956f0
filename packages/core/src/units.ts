/** Speed of light in vacuum, exact (SI, 2019). */
export const SPEED_OF_LIGHT_M_PER_S = 299_792_458;
/** Exact (international yard and pound agreement, 1959). */
export const MM_PER_INCH = 25.4;
export const MS_PER_MINUTE = 60_000;
export const MS_PER_HOUR = 3_600_000;

/** A ratio of powers in decibels: 10 log10(ratio). 0 gives -Infinity, below 0 NaN. */
export function decibels(ratio: number): number {
  return 10 * Math.log10(ratio);
}

/** The ratio of powers that a number of decibels stands for; -Infinity gives 0. */
export function ratioFromDecibels(db: number): number {
  return 10 ** (db / 10);
}

/** Radar reflectivity factor Z from dBZ, which is decibels over 1 mm6 m-3; undetect (-Infinity) gives 0, NaN stays NaN. */
export function zMm6PerM3(reflectivityDbz: number): number {
  return ratioFromDecibels(reflectivityDbz);
}

/** Z in SI units: 1 mm6 m-3 is 1e-18 m3. */
export function zM3(reflectivityDbz: number): number {
  return zMm6PerM3(reflectivityDbz) * 1e-18;
}

/** Depth in mm of a rate in mm/h that is held for a time. */
export function heldDepthMm(rateMmPerHour: number, durationMs: number): number {
  return (rateMmPerHour * durationMs) / MS_PER_HOUR;
}

/** Volume of water that a depth makes over an area: 1 mm over 1 km2 is 1000 m3. */
export function waterVolumeM3(depthMm: number, areaKm2: number): number {
  return depthMm * areaKm2 * 1000;
}

/** Flow that a rain rate feeds over an area: 1 mm/h over 1 km2 is 0.2778 m3/s. */
export function waterFlowM3PerS(rateMmPerHour: number, areaKm2: number): number {
  return waterVolumeM3(rateMmPerHour, areaKm2) / 3600;
}

/** Wavelength in vacuum of a frequency above 0. */
export function wavelengthM(frequencyHz: number): number {
  return SPEED_OF_LIGHT_M_PER_S / frequencyHz;
}

/** Frequency of a wavelength above 0 in vacuum. */
export function frequencyHz(wavelengthOfM: number): number {
  return SPEED_OF_LIGHT_M_PER_S / wavelengthOfM;
}
