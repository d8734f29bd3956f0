import { SPEED_OF_LIGHT_M_PER_S } from "./units.ts";

const RAD_PER_DEG = Math.PI / 180;

/** Depth of the pulse volume along the ray: c tau / 2. */
export function rangeResolutionM(pulseLengthS: number): number {
  return (SPEED_OF_LIGHT_M_PER_S * pulseLengthS) / 2;
}

/**
 * Volume that one pulse lights up between the half-power points of the beam.
 *
 * @param rangeM - slant range
 * @param depthM - along the ray, from {@link rangeResolutionM}
 */
export function geometricVolumeM3(
  rangeM: number,
  beamWidthDeg: { readonly horizontal: number; readonly vertical: number },
  depthM: number,
): number {
  const across = rangeM * beamWidthDeg.horizontal * RAD_PER_DEG;
  const upwards = rangeM * beamWidthDeg.vertical * RAD_PER_DEG;
  return (Math.PI / 4) * across * upwards * depthM;
}

/**
 * Volume that counts in the radar equation: the geometric one over 2 ln2, as a Gaussian beam lights its
 * edges less. Source: Probert-Jones (1962), Q. J. R. Meteorol. Soc. 88, 485-495.
 */
export function effectiveVolumeM3(
  rangeM: number,
  beamWidthDeg: { readonly horizontal: number; readonly vertical: number },
  depthM: number,
): number {
  return geometricVolumeM3(rangeM, beamWidthDeg, depthM) / (2 * Math.LN2);
}

/** Range beyond which an echo comes back after the next pulse: c / (2 PRF). @param prfHz - above 0 */
export function unambiguousRangeM(prfHz: number): number {
  return SPEED_OF_LIGHT_M_PER_S / (2 * prfHz);
}

/** Largest radial velocity that is told apart from its folded twin: lambda PRF / 4. */
export function nyquistVelocityMPerS(prfHz: number, wavelengthM: number): number {
  return (wavelengthM * prfHz) / 4;
}
