import type { Grid } from "@rainreckon/core";

/**
 * A field that changes evenly across a cell has, at a point anywhere in it, a variance about the cell's mean of 1/3 of
 * its semivariance at a distance of one cell (Journel & Huijbregts 1978, Mining Geostatistics: the extension variance
 * of a point to a square under a semivariance that grows with the square of the distance).
 */
const EXTENSION_SHARE = 1 / 3;

/**
 * Variance of a point anywhere in a cell about the cell's mean, mm²: from how much the field changes to the cells
 * beside it, so that a gauge under a steep edge of rain is trusted less to speak for its cell.
 *
 * @param totalMm - shape [ny, nx]; NaN is not observed
 * @returns 0 where no cell beside it was observed
 */
export function pointToCellVariance({ nx, ny }: Grid, totalMm: ArrayLike<number>, cell: number): number {
  const column = cell % nx;
  const row = (cell - column) / nx;
  const beside: number[] = [];
  if (column > 0) beside.push(cell - 1);
  if (column < nx - 1) beside.push(cell + 1);
  if (row > 0) beside.push(cell - nx);
  if (row < ny - 1) beside.push(cell + nx);
  let sum = 0;
  let count = 0;
  for (const other of beside) {
    const step = totalMm[other] - totalMm[cell];
    if (Number.isNaN(step)) continue;
    sum += (step * step) / 2;
    count++;
  }
  return count === 0 ? 0 : (EXTENSION_SHARE * sum) / count;
}

/**
 * Standard deviation of the rounding of a tipping bucket over any interval, in tips: the difference of two even
 * distributions of one tip.
 */
export const TIP_ROUNDING = 1 / Math.sqrt(6);
