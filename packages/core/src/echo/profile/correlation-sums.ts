import type { PolarEcho } from "../polar-echo.ts";
import { RAIN_TYPE } from "../rain-type/steiner.ts";
import { unfitGate } from "./echo-ratios.ts";
import { type BeamSettings, gateHeights } from "./gate-table.ts";

/** Mean RHOHV of the echo in a band of ranges of one elevation. */
export interface CorrelationMean {
  /** Beam's centre above mean sea level, and its spread over height. */
  readonly centreM: number;
  readonly sigmaM: number;
  readonly rangeM: number;
  readonly rhohv: number;
  /** Standard error. */
  readonly error: number;
}

const BAND_M = 1000;
/** Weaker echo correlates less for its noise alone. */
const WEAKEST_DBZ = 15;
/** Below is no rain and no snow, above no correlation; common practice. */
const LEAST_RHOHV = 0.8;
const MOST_RHOHV = 1.05;
/** A beam that is wider over height than this (one sigma) does not tell a melting layer from its surroundings. */
const WIDEST_SIGMA_M = 400;
/** Gates that a band needs, and how many neighbours share one independent value; house rules. */
const ENOUGH_GATES = 50;
const GATES_PER_VALUE = 10;
/** Error that no number of gates takes away. */
const LEAST_ERROR = 0.002;

interface ElevationSums {
  readonly centreM: Float64Array;
  readonly sigmaM: Float64Array;
  /** Shape [bands] each. */
  readonly count: Float64Array;
  readonly sum: Float64Array;
  readonly sum2: Float64Array;
}

/** Collects RHOHV of rain and snow by elevation and range. */
export class CorrelationSums {
  readonly #settings: BeamSettings;
  readonly #sums = new Map<string, ElevationSums>();

  constructor(settings: BeamSettings = {}) {
    this.#settings = settings;
  }

  add(echo: PolarEcho, rainType: Uint8Array | undefined): void {
    const { header, dbz, rhohv } = echo;
    if (rhohv === undefined) return;
    const { rayCount, gateCount, firstGateCentreM, gateLengthM, elevationDeg } = header;
    const { centreM, sigmaM } = gateHeights(header, this.#settings);
    const bands = Math.floor((firstGateCentreM + gateCount * gateLengthM) / BAND_M) + 1;
    const key = `${elevationDeg.toFixed(1)} ${bands} ${firstGateCentreM} ${gateLengthM}`;
    const sums = this.#sums.get(key) ?? emptySums(bands);
    if (!this.#sums.has(key)) {
      this.#sums.set(key, sums);
      for (let gate = gateCount - 1; gate >= 0; gate--) {
        const band = Math.floor((firstGateCentreM + gate * gateLengthM) / BAND_M);
        sums.centreM[band] = centreM[gate] as number;
        sums.sigmaM[band] = sigmaM[gate] as number;
      }
    }
    const unfit = unfitGate(echo);
    let reach = 0;
    while (reach < gateCount && (sigmaM[reach] as number) <= WIDEST_SIGMA_M) reach++;
    for (let ray = 0; ray < rayCount; ray++) {
      for (let gate = 0; gate < reach; gate++) {
        const index = ray * gateCount + gate;
        const rho = rhohv[index] as number;
        if (!((dbz[index] as number) >= WEAKEST_DBZ && rho >= LEAST_RHOHV && rho <= MOST_RHOHV)) continue;
        if (unfit(index) || rainType?.[index] === RAIN_TYPE.convective) continue;
        const band = Math.floor((firstGateCentreM + gate * gateLengthM) / BAND_M);
        (sums.count[band] as number)++;
        (sums.sum[band] as number) += rho;
        (sums.sum2[band] as number) += rho * rho;
      }
    }
  }

  means(): CorrelationMean[] {
    return [...this.#sums.keys()].sort().flatMap((key) => meansOf(this.#sums.get(key) as ElevationSums));
  }
}

function emptySums(bands: number): ElevationSums {
  const zeros = () => new Float64Array(bands);
  return { centreM: zeros(), sigmaM: zeros(), count: zeros(), sum: zeros(), sum2: zeros() };
}

function meansOf(sums: ElevationSums): CorrelationMean[] {
  const found: CorrelationMean[] = [];
  for (let band = 0; band < sums.count.length; band++) {
    const count = sums.count[band] as number;
    if (count < ENOUGH_GATES) continue;
    const rhohv = (sums.sum[band] as number) / count;
    const variance = Math.max(0, (sums.sum2[band] as number) / count - rhohv * rhohv);
    found.push({
      centreM: sums.centreM[band] as number,
      sigmaM: sums.sigmaM[band] as number,
      rangeM: (band + 0.5) * BAND_M,
      rhohv,
      error: Math.hypot(Math.sqrt((variance * GATES_PER_VALUE) / count), LEAST_ERROR),
    });
  }
  return found;
}
