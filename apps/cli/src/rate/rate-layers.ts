import type { Grid, Notice } from "@rainreckon/core";
import type { RateLayer } from "@rainreckon/mosaic";
import { type JobRadar, type JobRound, noCounts, type UnitCounts } from "../total/job.ts";
import { RoundLayers } from "../total/round-layers.ts";

/** What one radar shows of one round. */
export interface RateLayerOfRadar extends RateLayer {
  readonly radar: JobRadar;
  /** What was read, and what was done to it. */
  readonly counts: UnitCounts;
}

/** One round of one radar on the grid, lowest sweeps first; undefined where it shows nothing of the grid. */
export function rateLayer(
  grid: Grid,
  radar: JobRadar,
  round: JobRound,
  onNotice: (notice: Notice) => void,
): RateLayerOfRadar | undefined {
  const layers = new RoundLayers(radar, { grid, variants: [], headlineCells: new Int32Array() });
  const counts = noCounts();
  const layer = layers.layer(round, counts, ({ what, where, fix }) => onNotice({ what, where, fix }));
  return layer === undefined ? undefined : { ...layer, radar, counts };
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
