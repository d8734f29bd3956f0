/**
 * A map grid of square cells in a projected coordinate system in metres.
 *
 * Row 0 is the northernmost row, column 0 the westernmost: cell (row, column) has the flat index
 * row * nx + column, its centre at x = westM + (column + 0.5) * cellM, y = northM - (row + 0.5) * cellM.
 */
export interface Grid {
  /** A PROJ string or an authority code such as "EPSG:3035". */
  readonly crs: string;
  /** x of the western edge of column 0; a whole multiple of cellM unless laid upon another raster. */
  readonly westM: number;
  /** y of the northern edge of row 0; as `westM`. */
  readonly northM: number;
  readonly cellM: number;
  readonly nx: number;
  readonly ny: number;
}

/** What a field of values holds. The unit is part of the name. */
export type Quantity =
  | "reflectivityDbz"
  | "rainRateMmPerHour"
  | "depthMm"
  | "fraction"
  | "heightM"
  | "weight";

/** Values on a grid: shape [ny, nx], row-major, row 0 in the north. NaN is not observed. */
export interface Field<Q extends Quantity = Quantity> {
  readonly grid: Grid;
  readonly quantity: Q;
  readonly values: Float32Array;
}

/** Centre of a cell in the grid's own coordinates, metres. */
export function cellCentre(grid: Grid, index: number): { xM: number; yM: number } {
  const column = index % grid.nx;
  const row = (index - column) / grid.nx;
  return { xM: grid.westM + (column + 0.5) * grid.cellM, yM: grid.northM - (row + 0.5) * grid.cellM };
}

/** Flat index of the cell that holds a point, or -1 outside. A point on an edge belongs to the cell east or south of it. */
export function cellIndexAt(grid: Grid, xM: number, yM: number): number {
  const column = Math.floor((xM - grid.westM) / grid.cellM);
  const row = Math.floor((grid.northM - yM) / grid.cellM);
  if (!(column >= 0 && column < grid.nx && row >= 0 && row < grid.ny)) return -1;
  return row * grid.nx + column;
}
