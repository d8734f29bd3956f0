import { markBit, type PolarEcho } from "../polar-echo.ts";
import { ramp } from "./ramp.ts";

const NOT_LIQUID = markBit("melting") | markBit("snow");

/** False where the profile marked melting snow or snow. */
export function isLiquid(marks: number): boolean {
  return (marks & NOT_LIQUID) === 0;
}

/** RHOHV under which a moment is clutter's or noise, and from which it counts fully; hail lies above. House rule. */
const CORRELATION = { none: 0.7, full: 0.85 } as const;

/**
 * Reads the moments of a sweep as the rates use them: means over 3 rays and 3 gates, each gate by its RHOHV.
 *
 * ZDR and KDP are noisy, and ZDR is often stored in coarse steps; the mean of nine brings noise down to a third. It
 * is made when asked for, since most gates never need it.
 */
export class MomentReader {
  readonly #zdrDb: Float32Array | undefined;
  readonly #kdpDegPerKm: Float32Array | undefined;
  readonly #rhohv: Float32Array | undefined;
  readonly #zdrOffsetDb: number;
  readonly #gateCount: number;
  readonly #rayCount: number;
  readonly #closed: boolean;

  /** 0 to 1: how far the last mean rests on gates that look like weather; 0 where there was none. */
  trust = 0;

  /** @param zdrOffsetDb - taken off every ZDR */
  constructor(echo: PolarEcho, zdrOffsetDb: number) {
    this.#zdrDb = echo.zdrDb;
    this.#kdpDegPerKm = echo.kdpDegPerKm;
    this.#rhohv = echo.rhohv;
    this.#zdrOffsetDb = zdrOffsetDb;
    this.#gateCount = echo.header.gateCount;
    this.#rayCount = echo.header.rayCount;
    this.#closed = isClosed(echo.azimuthDeg);
  }

  /** NaN where it is not measured. */
  rhohv(gate: number): number {
    return this.#rhohv === undefined ? Number.NaN : this.#rhohv[gate];
  }

  /** NaN where none is measured nearby; {@link trust} goes with it. */
  zdrDb(gate: number): number {
    return this.#mean(this.#zdrDb, gate) - this.#zdrOffsetDb;
  }

  /** One way; the sign is kept. NaN where none is measured nearby; {@link trust} goes with it. */
  kdpDegPerKm(gate: number): number {
    return this.#mean(this.#kdpDegPerKm, gate);
  }

  #mean(moment: Float32Array | undefined, gate: number): number {
    this.trust = 0;
    if (moment === undefined) return Number.NaN;
    const gateCount = this.#gateCount;
    const middle = gate % gateCount;
    const ray = (gate - middle) / gateCount;
    const from = Math.max(0, middle - 1);
    const to = Math.min(gateCount - 1, middle + 1);
    let sum = 0;
    let weights = 0;
    for (let step = -1; step <= 1; step++) {
      let other = ray + step;
      if (other < 0 || other >= this.#rayCount) {
        if (!this.#closed) continue;
        other = (other + this.#rayCount) % this.#rayCount;
      }
      for (let at = other * gateCount + from; at <= other * gateCount + to; at++) {
        const value = moment[at];
        if (Number.isNaN(value)) continue;
        const correlation = this.rhohv(at);
        const weight = Number.isNaN(correlation) ? 1 : ramp(correlation, CORRELATION.none, CORRELATION.full);
        sum += weight * value;
        weights += weight;
      }
    }
    this.trust = Math.min(1, weights);
    return weights > 0 ? sum / weights : Number.NaN;
  }
}

/** True where the last ray lies beside the first: the opening between them is no wider than two rays. */
export function isClosed(azimuthDeg: Float64Array): boolean {
  const count = azimuthDeg.length;
  if (count < 3) return false;
  const turn = azimuthDeg[count - 1] - azimuthDeg[0];
  return 360 - turn <= (2 * turn) / (count - 1);
}
