import { rainRateMmPerHour } from "./relations.ts";
import { decibels, zMm6PerM3 } from "./units.ts";
import type { ZrRelation } from "./zr-relation.ts";

/** Exact (SI, 2019). */
const BOLTZMANN_J_PER_K = 1.380649e-23;
/** Temperature that noise figures are defined for (IEEE). */
export const NOISE_REFERENCE_K = 290;

/**
 * Thermal noise of a receiver, k T B F, in dBm.
 *
 * @param bandwidthHz - above 0; 1 gives the density per Hz
 * @param noiseFigureDb - 0 or more
 */
export function noisePowerDbm(
  bandwidthHz: number,
  noiseFigureDb: number,
  temperatureK = NOISE_REFERENCE_K,
): number {
  return decibels(1000 * BOLTZMANN_J_PER_K * temperatureK * bandwidthHz) + noiseFigureDb;
}

/**
 * Reflectivity at 1 km that gives the smallest signal the receiver tells from noise.
 *
 * @param signalDbm - smallest signal: the noise, plus what a detection needs above it
 * @param constantDb - radar constant, from `radarConstantDb`
 */
export function detectableAt1KmDbz(signalDbm: number, constantDb: number): number {
  return signalDbm + constantDb;
}

/**
 * Smallest reflectivity that is seen at a range: it grows with the square of the range and with the loss
 * on the way.
 *
 * @param at1KmDbz - from {@link detectableAt1KmDbz}, or the noise-equivalent reflectivity at 1 km of a file
 * @param twoWayLossDb - gas, rain and wet radome together
 */
export function detectableDbz(rangeM: number, at1KmDbz: number, twoWayLossDb = 0): number {
  return at1KmDbz + 2 * decibels(rangeM / 1000) + twoWayLossDb;
}

/** Lightest rain whose echo is seen, mm/h: the rate of the smallest reflectivity seen. */
export function lightestVisibleRainMmPerHour(detectable: number, relation: ZrRelation): number {
  return rainRateMmPerHour(detectable, relation);
}

/**
 * Diameter of the smallest single drop on the beam's axis that is seen.
 *
 * The point-target equation, Pr = Pt G2 lambda2 sigma / ((4 pi)3 r4 L) with sigma = pi5 |K|2 D6 / lambda4,
 * over the weather radar equation leaves D6 = Z times the effective pulse volume: one drop that shines as
 * much as a volume full of the faintest visible echo. Source: Probert-Jones (1962), both equations.
 *
 * @param detectable - smallest reflectivity seen at that range, dBZ
 * @param effectiveVolume - of the pulse at that range, m3, from `effectiveVolumeM3`
 */
export function smallestVisibleDropMm(detectable: number, effectiveVolume: number): number {
  return (zMm6PerM3(detectable) * effectiveVolume) ** (1 / 6);
}
