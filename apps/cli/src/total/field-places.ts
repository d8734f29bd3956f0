import { cellCentre, type Grid } from "@rainreckon/core";
import type { FieldSamples } from "@rainreckon/verification";

/** Depths that are kept of the field in all, and places at most: 16 MB. */
const MOST_DEPTHS = 4e6;
const MOST_PLACES = 2500;
/** Coarser than this, a better place for a gauge cannot be told from its neighbours. House rule. */
const COARSEST_M = 8000;
/** Finer is of no use: a gauge that stands a cell off is not misplaced. */
const FINEST_M = 2000;

/**
 * Cells spread evenly over the map, of which the radar's steps are kept, so that another place can be looked for
 * where a gauge does not fit its own.
 *
 * @returns flat indices; empty where gauges are none, or where what may be kept would be too coarse
 */
export function fieldCells(grid: Grid, gaugeCount: number, stepCount: number): Int32Array {
  if (gaugeCount === 0) return new Int32Array();
  const most = Math.min(MOST_PLACES, Math.floor(MOST_DEPTHS / stepCount));
  let stride = Math.max(1, Math.round(FINEST_M / grid.cellM));
  while (count(grid.nx, stride) * count(grid.ny, stride) > most) stride++;
  if (stride * grid.cellM > COARSEST_M && stride > 1) return new Int32Array();
  const cells: number[] = [];
  const first = Math.floor(stride / 2);
  for (let row = first; row < grid.ny; row += stride) {
    for (let column = first; column < grid.nx; column += stride) cells.push(row * grid.nx + column);
  }
  return Int32Array.from(cells);
}

function count(length: number, stride: number): number {
  return Math.ceil((length - Math.floor(stride / 2)) / stride);
}

/** The kept cells with their places; undefined where none are kept. */
export function fieldSamples(
  grid: Grid,
  cells: Int32Array,
  depthMm: readonly Float32Array[],
  startEpochMs: number,
  stepMs: number,
): FieldSamples | undefined {
  if (cells.length === 0) return undefined;
  const centres = Array.from(cells, (cell) => cellCentre(grid, cell));
  return {
    startEpochMs,
    stepMs,
    xKm: Float64Array.from(centres, ({ xM }) => xM / 1000),
    yKm: Float64Array.from(centres, ({ yM }) => yM / 1000),
    depthMm,
  };
}
