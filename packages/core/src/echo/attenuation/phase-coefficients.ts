import { bandOfWavelength } from "../../bands.ts";

/** Two-way loss per degree of PHIDP: the customary value and the spread that is published. */
export interface PhaseCoefficient {
  readonly dbPerDeg: number;
  readonly lowDbPerDeg: number;
  readonly highDbPerDeg: number;
}

/** What rain takes from ZH, and from ZDR, per degree of PHIDP. */
export interface PhaseCoefficients {
  readonly loss: PhaseCoefficient;
  readonly differentialLoss: PhaseCoefficient;
}

/**
 * Coefficients by band.
 *
 * Source: Bringi and Chandrasekar (2001), Polarimetric Doppler Weather Radar, section 7.4; Carey et al. (2000),
 * J. Appl. Meteorol. 39, 1405-1433; Testud et al. (2000), J. Atmos. Oceanic Technol. 17, 332-356. The 0.08 of
 * C band is confirmed there, the other numbers are from memory. Drop sizes and temperature make the spread.
 */
const BY_BAND: Readonly<Record<string, PhaseCoefficients>> = {
  S: { loss: spread(0.02, 0.015, 0.04), differentialLoss: spread(0.004, 0.002, 0.008) },
  C: { loss: spread(0.08, 0.05, 0.13), differentialLoss: spread(0.02, 0.01, 0.04) },
  X: { loss: spread(0.28, 0.14, 0.35), differentialLoss: spread(0.04, 0.03, 0.06) },
};

function spread(dbPerDeg: number, lowDbPerDeg: number, highDbPerDeg: number): PhaseCoefficient {
  return { dbPerDeg, lowDbPerDeg, highDbPerDeg };
}

/** @returns undefined outside S, C and X band, for which no coefficient stands here */
export function phaseCoefficients(wavelengthM: number): PhaseCoefficients | undefined {
  const letter = bandOfWavelength(wavelengthM)?.letter;
  return letter === undefined ? undefined : BY_BAND[letter];
}

/** Loss both ways of a phase that rain has made, dB: PHIDP is two-way itself, so there is no further 2. */
export function lossOfPhaseTwoWayDb(rainPhaseDeg: number, alphaDbPerDeg: number): number {
  return alphaDbPerDeg * rainPhaseDeg;
}
