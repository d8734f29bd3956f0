import { beamHeightM, effectiveRadiusM } from "../../beam.ts";
import type { PolarEcho } from "../polar-echo.ts";
import { DEFAULT_PHASE_SETTINGS, folded, type PhaseSettings, phaseGates } from "./phase-gates.ts";
import { fitPhaseModel, PHASE_BINS, Z_BINS, Z_LOW_DBZ } from "./phase-model.ts";

/** What one line of evidence says of the two-way loss per degree of PHIDP. */
export interface LossEstimate {
  /** May come out below 0 where there is no loss: it is an estimate. */
  readonly alphaDbPerDeg: number;
  readonly standardErrorDbPerDeg: number;
}

/** House rules of the learner. */
export interface LossLearnerSettings {
  /** Well correlated echo is rain without hail, melting snow or clutter. */
  readonly leastCorrelation: number;
  /** Gates above this height over sea level are left out: the bottom of the melting layer, where known. */
  readonly rainBelowM: number;
  /** Least pairs of gates, and least spread of their phase in degrees, that an estimate may rest on. */
  readonly leastPairs: number;
  readonly leastSpreadDeg: number;
  /**
   * By how much the echo of rain behind rain may differ from that of rain before it at the same KDP, because
   * its drops do: dB over one standard deviation of phase. House rule; no sample of one storm can show it.
   */
  readonly dropSizeErrorDb: number;
  readonly phase: PhaseSettings;
}

export const DEFAULT_LOSS_LEARNER_SETTINGS: LossLearnerSettings = {
  leastCorrelation: 0.97,
  rainBelowM: Number.POSITIVE_INFINITY,
  leastPairs: 5000,
  leastSpreadDeg: 3,
  dropSizeErrorDb: 0.15,
  phase: DEFAULT_PHASE_SETTINGS,
};

const SECTORS = 12;
const PHASE_STEP_DEG = 4;
const CELLS = Z_BINS * PHASE_BINS;
/** KDP is summed in whole thousandths of a degree per km, so that the order of sweeps leaves no trace. */
const PER_DEG = 1000;
/** A step between neighbours that no rain makes. */
const WILD_STEP_DEG = 45;

/**
 * Learns from one radar alone how much rain takes from its echo per degree of PHIDP.
 *
 * In rain KDP follows Z: KDP = c Z^b. Measured Z is too low by alpha times the phase so far, so that among gates
 * of the same measured Z those behind more phase show more KDP, and alpha is the slope along phase over the slope
 * along Z. c, b and alpha are all fitted, so that neither the calibration of Z nor the shape of drops is assumed.
 *
 * Source: the self-consistency of Z, KDP and attenuation, Bringi, Keenan and Chandrasekar (2001), IEEE Trans.
 * Geosci. Remote Sens. 39, 1906-1915, and the regression of Z on PHIDP at given KDP, Carey et al. (2000),
 * J. Appl. Meteorol. 39, 1405-1433 (both from memory); turned here into a regression of KDP, which alone is noisy,
 * on Z and PHIDP, so that noise does not bias it and weak echo may be left out.
 *
 * A shower whose drops make more KDP than its Z tells also lies behind more phase, its own: this draws alpha up a
 * little where showers differ much, and is among what `dropSizeErrorDb` stands for.
 *
 * The sums are of whole numbers: any order of sweeps gives the same.
 */
export class LossCoefficientLearner {
  readonly #settings: LossLearnerSettings;
  readonly #counts = new Float64Array(SECTORS * CELLS);
  readonly #sums = new Float64Array(SECTORS * CELLS);
  /** Of the weakest echo, whose KDP is noise alone. */
  #noiseSquares = 0;
  #noiseCount = 0;

  constructor(settings: LossLearnerSettings = DEFAULT_LOSS_LEARNER_SETTINGS) {
    this.#settings = settings;
  }

  /** Adds a sweep that was screened and whose phase was worked up; does nothing with any other. */
  add(echo: PolarEcho): void {
    const { phidpDeg, rainPhaseDeg, rhohv, dbz, header } = echo;
    if (phidpDeg === undefined || rainPhaseDeg === undefined) return;
    const { leastCorrelation, phase } = this.#settings;
    const { good } = phaseGates(echo, phidpDeg, { ...phase, leastCorrelation });
    const { gateCount, rayCount } = header;
    const rainGates = this.#gatesInRain(echo);
    const perGate = (PER_DEG * 0.5 * 1000) / header.gateLengthM;
    for (let ray = 0; ray < rayCount; ray++) {
      const sector = Math.floor(((echo.azimuthDeg[ray] as number) * SECTORS) / 360) % SECTORS;
      for (let gate = ray * gateCount; gate < ray * gateCount + rainGates - 1; gate++) {
        if (good[gate] === 0 || good[gate + 1] === 0) continue;
        // Without RHOHV nothing tells hail or melting snow; the height and the limits of Z must do.
        if (rhohv === undefined && echo.marks[gate] !== 0) continue;
        const z = 0.5 * ((dbz[gate] as number) + (dbz[gate + 1] as number)) - Z_LOW_DBZ;
        if (!(z >= 0 && z < Z_BINS)) continue;
        const rain = 0.5 * ((rainPhaseDeg[gate] as number) + (rainPhaseDeg[gate + 1] as number));
        const phaseBin = Math.floor(rain / PHASE_STEP_DEG);
        const stepDeg = folded((phidpDeg[gate + 1] as number) - (phidpDeg[gate] as number), phase.foldDeg);
        if (phaseBin >= PHASE_BINS || Math.abs(stepDeg) > WILD_STEP_DEG) continue;
        const cell = sector * CELLS + Math.floor(z) * PHASE_BINS + phaseBin;
        const kdp = Math.round(stepDeg * perGate);
        this.#counts[cell] = (this.#counts[cell] as number) + 1;
        this.#sums[cell] = (this.#sums[cell] as number) + kdp;
        if (z < 2) {
          this.#noiseSquares += kdp * kdp;
          this.#noiseCount++;
        }
      }
    }
  }

  /**
   * @returns undefined where too little rain was seen behind rain. The standard error joins how much alpha changes
   * as each twelfth of the circle is left out (jackknife; Efron 1982) with what drop sizes may feign
   */
  finish(): LossEstimate | undefined {
    const { leastPairs, leastSpreadDeg, dropSizeErrorDb } = this.#settings;
    const counts = new Float64Array(CELLS);
    const sums = new Float64Array(CELLS);
    for (let i = 0; i < this.#counts.length; i++) {
      counts[i % CELLS] = (counts[i % CELLS] as number) + (this.#counts[i] as number);
      sums[i % CELLS] = (sums[i % CELLS] as number) + (this.#sums[i] as number);
    }
    const spreadDeg = spreadOfPhase(counts);
    if (!(spreadDeg.pairs >= leastPairs && spreadDeg.deg >= leastSpreadDeg)) return undefined;
    const noise2 = this.#noiseCount === 0 ? 1 : this.#noiseSquares / this.#noiseCount / PER_DEG ** 2;
    const alphaOf = (n: Float64Array, sum: Float64Array) =>
      fitPhaseModel(n, sum, PER_DEG, PHASE_STEP_DEG, noise2)?.alphaDbPerDeg;
    const alphaDbPerDeg = alphaOf(counts, sums);
    if (alphaDbPerDeg === undefined) return undefined;
    const without: number[] = [];
    for (let sector = 0; sector < SECTORS; sector++) {
      const part = this.#counts.subarray(sector * CELLS, (sector + 1) * CELLS);
      const partSums = this.#sums.subarray(sector * CELLS, (sector + 1) * CELLS);
      if (part.every((n) => n === 0)) continue;
      const alpha = alphaOf(
        counts.map((n, i) => n - (part[i] as number)),
        sums.map((sum, i) => sum - (partSums[i] as number)),
      );
      // A sector without which nothing can be told carries it all: no error can be given.
      if (alpha === undefined) return undefined;
      without.push(alpha);
    }
    const many = without.length;
    if (many < 2) return undefined;
    const mean = without.reduce((sum, alpha) => sum + alpha, 0) / many;
    const squares = without.reduce((sum, alpha) => sum + (alpha - mean) ** 2, 0);
    return {
      alphaDbPerDeg,
      standardErrorDbPerDeg: Math.hypot(
        Math.sqrt((squares * (many - 1)) / many),
        dropSizeErrorDb / spreadDeg.deg,
      ),
    };
  }

  /** How many gates of a ray lie below the melting layer. */
  #gatesInRain({ header }: PolarEcho): number {
    const radiusM = effectiveRadiusM();
    for (let gate = 0; gate < header.gateCount; gate++) {
      const rangeM = header.firstGateCentreM + gate * header.gateLengthM;
      const heightM = header.site.antennaHeightM + beamHeightM(rangeM, header.elevationDeg, radiusM);
      if (heightM > this.#settings.rainBelowM) return gate;
    }
    return header.gateCount;
  }
}

/** Standard deviation of phase over all pairs. */
function spreadOfPhase(counts: Float64Array): { readonly pairs: number; readonly deg: number } {
  let pairs = 0;
  let sum = 0;
  let squares = 0;
  for (let cell = 0; cell < counts.length; cell++) {
    const n = counts[cell] as number;
    const deg = ((cell % PHASE_BINS) + 0.5) * PHASE_STEP_DEG;
    pairs += n;
    sum += n * deg;
    squares += n * deg * deg;
  }
  return { pairs, deg: Math.sqrt(Math.max(0, squares / pairs - (sum / pairs) ** 2)) };
}
