import type { RateLayer } from "@rainreckon/mosaic";
import type { RadarStep } from "./radar-step.ts";
import type { Part } from "./stretch.ts";

// What one part of a stretch adds to a step, at the cells that share it: small loops, which run often and are compiled
// early. Most cells are dry, and a sum is not touched to add nothing.

/**
 * Adds depth.
 *
 * @param at - position in the three arrays of each cell of the grid, -1 for none; undefined where they have all cells
 */
export function addDepth(
  depthMm: Float64Array,
  cells: Int32Array,
  { hours0, hours1 }: Part,
  rate0: Float32Array,
  rate1: Float32Array,
  at?: Int32Array,
): void {
  for (let k = 0; k < cells.length; k++) {
    const i = at === undefined ? cells[k] : at[cells[k]];
    if (i < 0) continue;
    const first = rate0[i];
    const last = rate1[i];
    if (first !== 0 || last !== 0) depthMm[i] += hours0 * first + hours1 * last;
  }
}

/** The same of what few layers have, in less room. */
export function addPlane(
  plane: Float32Array,
  cells: Int32Array,
  { hours0, hours1 }: Part,
  values0: Float32Array,
  values1: Float32Array,
): void {
  for (let k = 0; k < cells.length; k++) {
    const cell = cells[k];
    const first = values0[cell];
    const last = values1[cell];
    if (first !== 0 || last !== 0) plane[cell] += hours0 * first + hours1 * last;
  }
}

/** Adds the time that was observed, and beam height and weight times it. */
export function addTime(
  { observedMs, heightMMs, weightMs }: RadarStep,
  cells: Int32Array,
  ms: number,
  layer0: RateLayer,
  layer1: RateLayer,
): void {
  const height0 = layer0.beamHeightAslM;
  const height1 = layer1.beamHeightAslM;
  const weight0 = layer0.weight;
  const weight1 = layer1.weight;
  for (let k = 0; k < cells.length; k++) {
    const cell = cells[k];
    observedMs[cell] += ms;
    heightMMs[cell] += (ms * (height0[cell] + height1[cell])) / 2;
    weightMs[cell] += (ms * (weight0[cell] + weight1[cell])) / 2;
  }
}

export function addMs(plane: Float32Array, cells: Int32Array, ms: number): void {
  for (let k = 0; k < cells.length; k++) plane[cells[k]] += ms;
}
