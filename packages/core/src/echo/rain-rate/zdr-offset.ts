import type { PolarEcho } from "../polar-echo.ts";
import { isLiquid } from "./moment-reader.ts";

/** How much too high the ZDR of a radar reads. */
export interface LearnedZdrOffset {
  /** Taken off every ZDR, dB: `differenceDb` where that is beyond what weather does, else 0. */
  readonly offsetDb: number;
  /** Mean of measured less usual ZDR in light rain, dB; NaN with too few gates. */
  readonly differenceDb: number;
  /** Gates that it rests on. */
  readonly gateCount: number;
}

/** Usual ZDR by reflectivity. */
export interface UsualZdr {
  readonly dbz: number;
  readonly zdrDb: number;
}

/**
 * Mean ZDR of light rain, at the middles of classes of 2 dBZ: drops so small are nearly round whatever the storm.
 *
 * Source: Ryzhkov, Giangrande, Melnikov and Schuur (2005), J. Atmos. Oceanic Technol. 22, 1138-1155, for S band;
 * from memory. Small drops scatter alike at C and X band.
 */
export const USUAL_ZDR: readonly UsualZdr[] = [
  { dbz: 21, zdrDb: 0.23 },
  { dbz: 23, zdrDb: 0.27 },
  { dbz: 25, zdrDb: 0.32 },
  { dbz: 27, zdrDb: 0.38 },
];

const LOWEST_DBZ = 20;
const HIGHEST_DBZ = 28;
const LEAST_CORRELATION = 0.98;
/** Phase of rain behind which a differential loss would pull ZDR down, degrees. House rule. */
const MOST_RAIN_PHASE_DEG = 15;
/**
 * What drops of one storm may make of the mean. The papers keep to 0.1 to 0.2 dB over many; in a single storm of large drops
 * light rain has more, and to take that for the radar's would take away what ZDR tells of them. House rule.
 */
const WEATHER_DB = 0.5;
const LEAST_GATES = 2000;
/** Differences beyond it are no rain's. */
const MOST_DIFFERENCE_DB = 4;
const BIN_DB = 0.05;
/** Around the middle of the differences, what the mean is taken over: noise has both sides there, clutter none. */
const MEAN_WITHIN_DB = 1.5;

/** ZDR that light rain of a reflectivity usually has, dB; between the classes it is interpolated. */
export function usualZdrDb(reflectivityDbz: number): number {
  const last = USUAL_ZDR.length - 1;
  const at = Math.min(last - 1, Math.max(0, Math.floor((reflectivityDbz - USUAL_ZDR[0].dbz) / 2)));
  const [low, high] = [USUAL_ZDR[at], USUAL_ZDR[at + 1]];
  return low.zdrDb + ((high.zdrDb - low.zdrDb) * (reflectivityDbz - low.dbz)) / (high.dbz - low.dbz);
}

/**
 * Learns how far the ZDR of a radar is off from that of light rain over a run.
 *
 * Sums over gates, so that neither the order of sweeps nor who adds which of them has a part in the result.
 */
export class ZdrOffsetLearner {
  readonly #bins = new Float64Array(Math.round((2 * MOST_DIFFERENCE_DB) / BIN_DB));

  /** Adds a sweep; its reflectivity should be calibrated. A sweep without ZDR or RHOHV adds nothing. */
  add({ dbz, zdrDb, rhohv, rainPhaseDeg, screenedBy, marks }: PolarEcho): void {
    if (zdrDb === undefined || rhohv === undefined) return;
    for (let gate = 0; gate < dbz.length; gate++) {
      const value = dbz[gate];
      if (!(value >= LOWEST_DBZ && value <= HIGHEST_DBZ) || !(rhohv[gate] >= LEAST_CORRELATION)) continue;
      if (screenedBy[gate] !== 0 || !isLiquid(marks[gate])) continue;
      if (rainPhaseDeg !== undefined && !(rainPhaseDeg[gate] <= MOST_RAIN_PHASE_DEG)) continue;
      const bin = Math.floor((zdrDb[gate] - usualZdrDb(value) + MOST_DIFFERENCE_DB) / BIN_DB);
      if (bin >= 0 && bin < this.#bins.length) this.#bins[bin]++;
    }
  }

  finish(): LearnedZdrOffset {
    const gateCount = this.#bins.reduce((sum, gates) => sum + gates, 0);
    if (gateCount < LEAST_GATES) return { offsetDb: 0, differenceDb: Number.NaN, gateCount };
    let below = 0;
    let middle = 0;
    while (below + this.#bins[middle] < gateCount / 2) below += this.#bins[middle++];
    const reach = Math.round(MEAN_WITHIN_DB / BIN_DB);
    let sum = 0;
    let weight = 0;
    for (
      let bin = Math.max(0, middle - reach);
      bin <= Math.min(this.#bins.length - 1, middle + reach);
      bin++
    ) {
      sum += this.#bins[bin] * ((bin + 0.5) * BIN_DB - MOST_DIFFERENCE_DB);
      weight += this.#bins[bin];
    }
    const differenceDb = sum / weight;
    return { offsetDb: Math.abs(differenceDb) > WEATHER_DB ? differenceDb : 0, differenceDb, gateCount };
  }
}
