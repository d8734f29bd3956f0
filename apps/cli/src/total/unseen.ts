import type { BlendedStep } from "@rainreckon/accumulation";
import {
  type Grid,
  type Interval,
  lightestVisibleRainMmPerHour,
  MS_PER_HOUR,
  measuredDetectableDbz,
  type ZrRelation,
} from "@rainreckon/core";
import { distanceFrom } from "./distances.ts";
import type { JobRadar } from "./job.ts";

/**
 * Rain that the radars could not have seen: at every cell and step without rain, the depth that an echo just
 * below detection at that range would have added, by the shares that each radar spoke for.
 *
 * It is the most that may be missing for want of sensitivity, not an estimate of what is. A step with any
 * rain adds nothing. Where the sensitivity of a source that spoke is not known (gridded rain never tells), neither is
 * the depth: NaN.
 */
export class UnseenDepth {
  readonly #radars: readonly JobRadar[];
  readonly #grid: Grid;
  readonly #rates = new Map<string, Float32Array>();
  #sumMm: Float64Array;

  constructor(grid: Grid, radars: readonly JobRadar[]) {
    this.#grid = grid;
    this.#radars = radars;
    this.#sumMm = new Float64Array(grid.nx * grid.ny);
  }

  /** @param relationOf - the relation that held for a radar in that step */
  add(
    step: Interval,
    blended: BlendedStep,
    relationOf: (radar: number, epochMs: number) => ZrRelation,
  ): void {
    const middle = (step.startEpochMs + step.endEpochMs) / 2;
    const rates = this.#radars.map((_, r) => this.#ratesOf(r, relationOf(r, middle)));
    const { depthMm, shareMs } = blended;
    for (let r = 0; r < shareMs.length; r++) addUnseen(this.#sumMm, depthMm, shareMs[r], rates[r]);
  }

  /** The depth since the last call, as it is stored; the next interval starts from 0. */
  take(): Float32Array {
    const taken = Float32Array.from(this.#sumMm);
    this.#sumMm = new Float64Array(this.#sumMm.length);
    return taken;
  }

  /** Shape [cells], mm/h: the rain just below detection. */
  #ratesOf(r: number, relation: ZrRelation): Float32Array {
    const key = [r, relation.a, relation.b, relation.phase].join();
    let rates = this.#rates.get(key);
    if (rates === undefined) {
      const { sensitivity, offsetDb } = this.#radars[r];
      rates = distanceFrom(this.#grid, this.#radars[r]).map((rangeM) =>
        sensitivity === undefined
          ? Number.NaN
          : lightestVisibleRainMmPerHour(
              measuredDetectableDbz(Math.max(1, rangeM), sensitivity) + offsetDb,
              relation,
            ),
      );
      this.#rates.set(key, rates);
    }
    return rates;
  }
}

/** @param rate - of the rain just below detection, mm/h; undefined where it is not known */
function addUnseen(
  sumMm: Float64Array,
  depthMm: Float64Array,
  shareMs: Float64Array,
  rate: Float32Array | undefined,
): void {
  for (let cell = 0; cell < sumMm.length; cell++) {
    const ms = shareMs[cell];
    if (depthMm[cell] !== 0 || !(ms > 0)) continue;
    sumMm[cell] += (ms / MS_PER_HOUR) * (rate === undefined ? Number.NaN : rate[cell]);
  }
}
