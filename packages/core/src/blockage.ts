import { errorFunction } from "./error-function.ts";
import { decibels } from "./units.ts";

/**
 * Share of a uniform circular beam that terrain hides, for an obstacle with a level edge.
 *
 * Source: Bech, Codina, Lorente and Bebbington (2003), J. Atmos. Oceanic Technol. 20, 845-855.
 *
 * @param terrainAboveBeamM - terrain height minus the height of the beam's centre, same datum
 * @param beamRadiusM - half the half-power diameter, above 0
 * @returns 0 to 1; geometric shadow, no diffraction
 */
export function uniformBlockedFraction(terrainAboveBeamM: number, beamRadiusM: number): number {
  const y = terrainAboveBeamM / beamRadiusM;
  if (y <= -1) return 0;
  if (y >= 1) return 1;
  return (y * Math.sqrt(1 - y * y) + Math.asin(y)) / Math.PI + 0.5;
}

/**
 * Share of a Gaussian beam that a level edge hides.
 *
 * A level edge cuts both patterns along one axis, so the share is that of the normal distribution.
 * Half power at the beam radius gives exp(-4 ln2 (y / 2a)^2) one way, its square both ways.
 *
 * @param path - "one-way" weights by the pattern, "two-way" by its square, as received echo is
 * @returns 0 to 1. Other parameters as in {@link uniformBlockedFraction}
 */
export function gaussianBlockedFraction(
  terrainAboveBeamM: number,
  beamRadiusM: number,
  path: "one-way" | "two-way",
): number {
  const scale = Math.sqrt((path === "one-way" ? 4 : 8) * Math.LN2);
  return 0.5 * (1 + errorFunction((scale * terrainAboveBeamM) / (2 * beamRadiusM)));
}

/**
 * Blockage along a ray: behind an obstacle it never gets less.
 *
 * @param fraction - shape [gateCount], blocked share at each gate, nearest first; NaN (terrain not known)
 *   says nothing and passes on what is known from nearer gates
 * @returns shape [gateCount], the running maximum; NaN as long as nothing is known
 */
export function blockageAlongRay(fraction: Float64Array): Float64Array {
  const cumulative = new Float64Array(fraction.length);
  let highest = Number.NaN;
  for (let gate = 0; gate < fraction.length; gate++) {
    const here = fraction[gate] as number;
    if (!(highest >= here) && !Number.isNaN(here)) highest = here;
    cumulative[gate] = highest;
  }
  return cumulative;
}

/**
 * What to add to the reflectivity of a partly blocked gate: -10 log10(1 - fraction) dB.
 *
 * Common practice corrects up to 60 or 70 % and takes a higher sweep above that.
 *
 * @param blockedFraction - 0 to 1; 1 gives Infinity, as nothing is left to correct
 */
export function blockageCorrectionDb(blockedFraction: number): number {
  // The sum keeps an unblocked gate at 0, not -0.
  return 0 - decibels(1 - blockedFraction);
}
