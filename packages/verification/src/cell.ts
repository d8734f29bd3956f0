/** How the radar's value at a gauge is taken from the grid. */
export type CellChoice = "nearest" | "mean3x3";

/** The part of a grid that finding neighbours needs. */
export interface GridShape {
  readonly nx: number;
  readonly ny: number;
}

/**
 * The radar's value at a gauge.
 *
 * @param values - shape [ny, nx], NaN where not observed
 * @param index - flat index of the cell that holds the gauge, 0 to nx * ny - 1
 * @param choice - that cell, or the mean of the observed cells among it and its eight neighbours
 * @returns NaN where the gauge's own cell was not observed, whatever the neighbours hold
 * @throws RangeError if the index is outside the grid
 */
export function radarAtGauge(
  values: ArrayLike<number>,
  shape: GridShape,
  index: number,
  choice: CellChoice,
): number {
  const own = values[checkedIndex(shape, index)];
  if (choice === "nearest" || Number.isNaN(own)) return own;
  let sum = 0;
  let count = 0;
  for (const neighbour of cellsAround(shape, index)) {
    if (Number.isNaN(values[neighbour])) continue;
    sum += values[neighbour];
    count++;
  }
  return sum / count;
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
  for (const cell of cellsAround(shape, index)) {
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

/** Flat indices of a cell and those of its eight neighbours that exist, from north-west to south-east. */
export function cellsAround({ nx, ny }: GridShape, index: number): number[] {
  const column = index % nx;
  const row = (index - column) / nx;
  const cells: number[] = [];
  for (let r = Math.max(0, row - 1); r <= Math.min(ny - 1, row + 1); r++) {
    for (let c = Math.max(0, column - 1); c <= Math.min(nx - 1, column + 1); c++) cells.push(r * nx + c);
  }
  return cells;
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
