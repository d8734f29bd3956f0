import { decibels, SPEED_OF_LIGHT_M_PER_S } from "./units.ts";

/** What of a radar enters the weather radar equation. */
export interface RadarSystem {
  readonly peakPowerW: number;
  readonly antennaGainDb: number;
  /** Half-power beam width, one way. */
  readonly beamWidthDeg: { readonly horizontal: number; readonly vertical: number };
  readonly pulseLengthS: number;
  readonly wavelengthM: number;
  /** Transmit and receive together, without losses of the path and of a wet radome; 0 or more. */
  readonly systemLossDb: number;
  /** |K|2 of what scatters; 0.93 for water by convention. */
  readonly dielectricFactor: number;
}

const RAD_PER_DEG = Math.PI / 180;

/**
 * Refuses a radar that cannot be.
 *
 * @throws RangeError that names the first parameter that is not finite and above 0 (losses: 0 or more)
 */
export function checkRadarSystem(system: RadarSystem): void {
  const above0: readonly (readonly [string, number])[] = [
    ["peak power", system.peakPowerW],
    ["horizontal beam width", system.beamWidthDeg.horizontal],
    ["vertical beam width", system.beamWidthDeg.vertical],
    ["pulse length", system.pulseLengthS],
    ["wavelength", system.wavelengthM],
    ["dielectric factor", system.dielectricFactor],
  ];
  for (const [name, value] of above0) {
    if (!(value > 0 && Number.isFinite(value)))
      throw new RangeError(`the ${name} must be finite and above 0, got ${value}`);
  }
  if (!(system.systemLossDb >= 0 && Number.isFinite(system.systemLossDb)))
    throw new RangeError(`the system loss must be finite and 0 dB or more, got ${system.systemLossDb}`);
  if (!Number.isFinite(system.antennaGainDb))
    throw new RangeError(`the antenna gain must be finite, got ${system.antennaGainDb}`);
}

/**
 * Radar constant C in dBZ = P[dBm] + 20 log10(r[km]) + C.
 *
 * Source: Probert-Jones (1962), Q. J. R. Meteorol. Soc. 88, 485-495, for a Gaussian beam filled with
 * small drops: P = pi3 Pt G2 theta phi c tau |K|2 Z / (1024 ln2 lambda2 r2 L). Loss of a filter narrower
 * than the pulse (1.5 to 2.5 dB, common practice) is in it only if it is in `systemLossDb`.
 *
 * @throws RangeError as {@link checkRadarSystem}
 */
export function radarConstantDb(system: RadarSystem): number {
  checkRadarSystem(system);
  const { peakPowerW, antennaGainDb, beamWidthDeg, pulseLengthS, wavelengthM, systemLossDb } = system;
  const beamRad2 = beamWidthDeg.horizontal * beamWidthDeg.vertical * RAD_PER_DEG ** 2;
  // 1e-18 turns mm6 m-3 into m3, 1e3 W into mW, 1e-6 the square of m into that of km.
  const powerMwAt1Km =
    (Math.PI ** 3 * peakPowerW * beamRad2 * SPEED_OF_LIGHT_M_PER_S * pulseLengthS * system.dielectricFactor) /
    (1024 * Math.LN2 * wavelengthM ** 2);
  return systemLossDb - 2 * antennaGainDb - decibels(powerMwAt1Km * 1e3 * 1e-18 * 1e-6);
}

/**
 * Power at the receiver from a beam filled with echo.
 *
 * @param rangeM - slant range, above 0 and beyond the near field of the antenna
 * @param constantDb - from {@link radarConstantDb}, or as a file gives it
 * @param twoWayPathLossDb - gas, rain and wet radome together, both ways
 * @returns dBm; -Infinity for undetect
 */
export function receivedPowerDbm(
  reflectivityDbz: number,
  rangeM: number,
  constantDb: number,
  twoWayPathLossDb = 0,
): number {
  return reflectivityDbz - 2 * decibels(rangeM / 1000) - constantDb - twoWayPathLossDb;
}

/** Reflectivity that a power stands for, dBZ: {@link receivedPowerDbm} turned round. */
export function reflectivityOfPowerDbz(
  powerDbm: number,
  rangeM: number,
  constantDb: number,
  twoWayPathLossDb = 0,
): number {
  return powerDbm + 2 * decibels(rangeM / 1000) + constantDb + twoWayPathLossDb;
}
