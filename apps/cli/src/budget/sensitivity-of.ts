import {
  detectableAt1KmDbz,
  detectableDbz,
  measuredDetectableDbz,
  noisePowerDbm,
  radarConstantDb,
  scansDisprove,
  WATER_DIELECTRIC_FACTOR,
} from "@rainreckon/core";
import type { KnownRadar } from "./known-radar.ts";
import type { BudgetRadar } from "./schema.ts";

/** How sensitive a radar is, on what ground, and what is to be said about it. */
export interface SensitivityOf {
  readonly summary: BudgetRadar["sensitivity"];
  readonly radarConstantDb: number | undefined;
  readonly noiseDbm: number | undefined;
  readonly remarks: readonly string[];
  /**
   * Weakest echo seen at a range; undefined where nothing is known.
   *
   * @param lossDb - both ways, added where the ground is a figure at 1 km; echo measured at the range itself
   *   has been through the air already
   */
  readonly at: (rangeM: number, gasLossDb: number, radomeLossDb: number) => number | undefined;
}

/**
 * Chooses the best ground for a radar's sensitivity: system parameters where all are given, else the file's
 * noise-equivalent reflectivity unless its own scans disprove it, else the weakest echo measured.
 */
export function sensitivityOf(radar: KnownRadar, detectionDb: number): SensitivityOf {
  const remarks: string[] = [];
  const constantDb = constantOf(radar, remarks);
  const noiseDbm =
    radar.bandwidthHz === undefined || radar.noiseFigureDb === undefined
      ? undefined
      : noisePowerDbm(radar.bandwidthHz, radar.noiseFigureDb);
  const { measured } = radar;
  const inFile = radar.noiseEquivalentDbz;
  const ground = { constantDb, noiseDbm };
  const summary = (basis: BudgetRadar["sensitivity"]["basis"], at1KmDbz: number | undefined) => ({
    basis,
    at1KmDbz: at1KmDbz ?? null,
    inFileAt1KmDbz: inFile ?? null,
    measuredAt1KmDbz: measured?.at1KmDbz ?? null,
    measuredGates: measured?.gateCount ?? 0,
  });
  const bySquareLaw =
    (at1KmDbz: number) =>
    (rangeM: number, gasLossDb: number, radomeLossDb: number): number =>
      detectableDbz(rangeM, at1KmDbz, gasLossDb + radomeLossDb);
  const common = { radarConstantDb: ground.constantDb, noiseDbm: ground.noiseDbm, remarks };
  if (constantDb !== undefined && noiseDbm !== undefined) {
    const at1Km = detectableAt1KmDbz(noiseDbm + detectionDb, constantDb);
    return { ...common, summary: summary("system parameters", at1Km), at: bySquareLaw(at1Km) };
  }
  const disproved = inFile !== undefined && scansDisprove(inFile, measured);
  if (inFile !== undefined && !disproved) {
    const at1Km = inFile + detectionDb;
    return {
      ...common,
      summary: summary("noise-equivalent reflectivity in the file", at1Km),
      at: bySquareLaw(at1Km),
    };
  }
  if (measured !== undefined) {
    if (disproved) {
      remarks.push(
        `the file says a noise-equivalent reflectivity of ${inFile} dBZ at 1 km, yet its scans hold echo of ` +
          `${measured.at1KmDbz.toFixed(1)} dBZ (brought to 1 km): measured sensitivity is used`,
      );
    }
    remarks.push(
      "sensitivity is the weakest echo that the scans hold by range: thresholds set before they were written count as the end of sight",
    );
    return {
      ...common,
      summary: summary("measured in the scans", measured.at1KmDbz),
      at: (rangeM, _gasLossDb, radomeLossDb) => measuredDetectableDbz(rangeM, measured) + radomeLossDb,
    };
  }
  remarks.push(
    "sensitivity is not known: it takes peak power, pulse length, gain or beam width, frequency and noise figure, or scans with echo",
  );
  return { ...common, summary: summary("not known", undefined), at: () => undefined };
}

function constantOf(radar: KnownRadar, remarks: string[]): number | undefined {
  const { peakPowerW, antennaGainDb, beamWidthDeg, pulseLengthS, wavelengthM } = radar;
  if (
    peakPowerW === undefined ||
    antennaGainDb === undefined ||
    beamWidthDeg === undefined ||
    pulseLengthS === undefined ||
    wavelengthM === undefined
  ) {
    return radar.radarConstantDb;
  }
  if (radar.systemLossDb === undefined) remarks.push("losses inside the radar are not given: 0 dB taken");
  return radarConstantDb({
    peakPowerW,
    antennaGainDb,
    beamWidthDeg,
    pulseLengthS,
    wavelengthM,
    systemLossDb: radar.systemLossDb ?? 0,
    dielectricFactor: WATER_DIELECTRIC_FACTOR,
  });
}
