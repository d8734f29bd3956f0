import { type Grid, InputError, type Notice } from "@rainreckon/core";
import { type RateLayer, RateLayerBuilder } from "@rainreckon/mosaic";
import { openScans } from "../scans/scan-files.ts";
import type { JobRadar, JobRound } from "../total/job.ts";
import { lookupShelf } from "../total/lookup-shelf.ts";
import { placesOf } from "../total/places-of.ts";
import { countCapped, RateMaker } from "../total/rate-maker.ts";

/** What one radar shows of one round. */
export interface RateLayerOfRadar extends RateLayer {
  readonly radar: JobRadar;
  readonly gatesCapped: number;
}

const NO_CELLS = new Int32Array();

/** One round of one radar on the grid, lowest sweeps first; undefined where it shows nothing of the grid. */
export function rateLayer(
  grid: Grid,
  radar: JobRadar,
  round: JobRound,
  onNotice: (notice: Notice) => void,
): RateLayerOfRadar | undefined {
  const builder = new RateLayerBuilder(grid.nx * grid.ny, NO_CELLS, 0);
  const rates = new RateMaker(radar);
  let spoken = 0;
  let gatesCapped = 0;
  for (const volume of round.sweeps) {
    const { path, name, index, midEpochMs } = volume;
    try {
      const file = openScans(volume, placesOf(radar));
      try {
        const lookup = lookupShelf(grid, radar).forSweep(file.readSweep(index, []));
        if (!builder.canFill(lookup)) continue;
        const sweep = file.readSweep(index, [radar.moment]);
        const where = `${name}, ${sweep.origin.dataset}`;
        const gates = rates.rates(sweep, rates.relationAt(midEpochMs), where);
        spoken += builder.add(lookup, gates, [], midEpochMs);
        gatesCapped += countCapped(gates);
      } finally {
        file.close();
      }
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      onNotice({ what: error.what, where: error.where.replace(path, name), fix: error.fix });
    }
  }
  return spoken > 0 ? { ...builder.finish(), radar, gatesCapped } : undefined;
}

/**
 * Rates of several radars as one: Σ w·R over the radars that observed a cell, by their weights; where all weights are
 * 0, at the very edge of their coverage, their mean.
 *
 * @returns shape [cellCount], mm h-1; NaN where no radar observed
 */
export function blendRates(layers: readonly RateLayer[], cellCount: number): Float32Array {
  const blended = new Float32Array(cellCount).fill(Number.NaN);
  for (let cell = 0; cell < cellCount; cell++) {
    let [weighted, weights, plain, count] = [0, 0, 0, 0];
    for (const { rateMmPerHour, weight } of layers) {
      const rate = rateMmPerHour[cell] as number;
      if (Number.isNaN(rate)) continue;
      weighted += rate * (weight[cell] as number);
      weights += weight[cell] as number;
      plain += rate;
      count++;
    }
    if (count > 0) blended[cell] = weights > 0 ? weighted / weights : plain / count;
  }
  return blended;
}
