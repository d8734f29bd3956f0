import { cellsForPoint } from "@rainreckon/accumulation";

/** The part of a grid that finding neighbours needs. */
export interface GridShape {
  readonly nx: number;
  readonly ny: number;
}

/**
 * The value among the gauge's cell and its eight neighbours that lies closest to what the gauge read.
 *
 * It shows whether rain fell beside the gauge's cell (wind drift, a position off by a cell). It
 * makes any radar look good, so it is a diagnostic of displacement and never enters a score. Of values
 * equally close the one nearest to the gauge's cell is taken, then the northernmost, then the westernmost.
 *
 * @param gaugeMm - depth of the gauge over the field's interval
 * @returns value and cell, or undefined where none of the nine cells was observed
 * @throws RangeError if the index is outside the grid
 */
export function closestOf3x3(
  values: ArrayLike<number>,
  shape: GridShape,
  index: number,
  gaugeMm: number,
): { readonly valueMm: number; readonly index: number } | undefined {
  checkedIndex(shape, index);
  let best: { valueMm: number; index: number } | undefined;
  let bestError = Number.POSITIVE_INFINITY;
  let bestDistance = Number.POSITIVE_INFINITY;
  for (const cell of cellsForPoint(shape, index, "mean3x3")) {
    const error = Math.abs(values[cell] - gaugeMm);
    const distance = squaredCellDistance(shape, index, cell);
    if (error < bestError || (error === bestError && distance < bestDistance)) {
      best = { valueMm: values[cell], index: cell };
      bestError = error;
      bestDistance = distance;
    }
  }
  return best;
}

function squaredCellDistance({ nx }: GridShape, a: number, b: number): number {
  const columns = (a % nx) - (b % nx);
  const rows = Math.floor(a / nx) - Math.floor(b / nx);
  return columns * columns + rows * rows;
}

function checkedIndex({ nx, ny }: GridShape, index: number): number {
  if (!(Number.isInteger(index) && index >= 0 && index < nx * ny)) {
    throw new RangeError(`cell ${index} is outside a grid of ${nx} x ${ny}`);
  }
  return index;
}
