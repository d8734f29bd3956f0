import { cellCentre, cellIndexAt, type Grid } from "@rainreckon/core";
import type { Projection } from "./projection.ts";
import type { CellLookup } from "./rate-layer.ts";

/** Where the cells of rain that is gridded already lie. Row 0 is the northernmost, column 0 the westernmost. */
export type SourceCells =
  | {
      readonly kind: "even";
      readonly nx: number;
      readonly ny: number;
      readonly map: Projection;
      /** Edges of cell (0, 0) and size of the cells in the coordinates of `map`: metres, degrees where geographic. */
      readonly west: number;
      readonly north: number;
      readonly cellWidth: number;
      readonly cellHeight: number;
    }
  | {
      readonly kind: "positions";
      readonly nx: number;
      readonly ny: number;
      /** Centre of each cell, shape [ny * nx] each, WGS 84. */
      readonly lonDeg: Float64Array;
      readonly latDeg: Float64Array;
    };

/**
 * Which cells of a gridded source make which cell of a grid, once for each pair of them.
 *
 * A cell is made of the source cells whose centre lies in it; where none does (a source coarser than the grid), of
 * the source cell that holds its centre. Blend weight is 1 wherever the source reaches; a beam height it has none, NaN.
 *
 * @param map - the projection of `grid`
 */
export function gridLookup(grid: Grid, map: Projection, source: SourceCells): CellLookup {
  const cellCount = grid.nx * grid.ny;
  const { cellOfSource, holderOf } =
    source.kind === "even" ? evenCells(grid, map, source) : positionedCells(grid, map, source);

  const sourcesInCell = new Int32Array(cellCount);
  for (const cell of cellOfSource.cell) if (cell >= 0) sourcesInCell[cell]++;
  const holder = new Int32Array(cellCount).fill(-1);
  const position = new Int32Array(cellCount).fill(-1);
  let covered = 0;
  let total = 0;
  for (let cell = 0; cell < cellCount; cell++) {
    if (sourcesInCell[cell] === 0) {
      holder[cell] = holderOf(cell);
      if (holder[cell] === -1) continue;
      sourcesInCell[cell] = 1;
    }
    position[cell] = covered++;
    total += sourcesInCell[cell];
  }
  const cells = new Int32Array(covered);
  const start = new Int32Array(covered + 1);
  const gates = new Int32Array(total);
  const weight = new Float32Array(cellCount);
  for (let cell = 0; cell < cellCount; cell++) {
    const at = position[cell];
    if (at < 0) continue;
    cells[at] = cell;
    start[at + 1] = start[at] + sourcesInCell[cell];
    weight[cell] = 1;
    if (holder[cell] >= 0) gates[start[at]] = holder[cell];
  }
  const next = start.slice(0, covered);
  for (let k = 0; k < cellOfSource.cell.length; k++) {
    const at = cellOfSource.cell[k] < 0 ? -1 : position[cellOfSource.cell[k]];
    if (at >= 0) gates[next[at]++] = cellOfSource.indexOf(k);
  }
  return {
    cells,
    start,
    gates,
    position,
    beamHeightAslM: new Float32Array(cellCount).fill(Number.NaN),
    weight,
  };
}

interface Matched {
  readonly cellOfSource: {
    /** Grid cell that holds the centre of each source cell looked at, -1 for none. */
    readonly cell: Int32Array;
    /** Flat index of such a source cell. */
    indexOf(k: number): number;
  };
  /** Flat index of the source cell that holds the centre of a grid cell, -1 for none. */
  holderOf(cell: number): number;
}

function evenCells(grid: Grid, map: Projection, source: SourceCells & { readonly kind: "even" }): Matched {
  const { nx, ny, west, north, cellWidth, cellHeight } = source;
  const same = source.map.crs === map.crs;
  const [column, row] = [new Float64Array(grid.nx * grid.ny), new Float64Array(grid.nx * grid.ny)];
  for (let cell = 0; cell < column.length; cell++) {
    const { xM, yM } = cellCentre(grid, cell);
    const [x, y] = same ? [xM, yM] : fromLonLat(source.map, ...map.inverse(xM, yM));
    // Longitudes of a source may run from 0 to 360 as well as from -180 to 180.
    const turned = source.map.geographic ? west + ((((x - west) % 360) + 360) % 360) : x;
    column[cell] = (turned - west) / cellWidth;
    row[cell] = (north - y) / cellHeight;
  }
  const [columns, rows] = [reached(column, nx, grid.nx), reached(row, ny, grid.nx)];
  const width = columns.to - columns.from;
  const cell = new Int32Array(Math.max(0, width * (rows.to - rows.from)));
  const indexOf = (k: number) => (rows.from + Math.floor(k / width)) * nx + columns.from + (k % width);
  for (let k = 0; k < cell.length; k++) {
    const x = west + (columns.from + (k % width) + 0.5) * cellWidth;
    const y = north - (rows.from + Math.floor(k / width) + 0.5) * cellHeight;
    cell[k] = same
      ? cellIndexAt(grid, x, y)
      : cellIndexAt(grid, ...map.forward(...toLonLat(source.map, x, y)));
  }
  return {
    cellOfSource: { cell, indexOf },
    holderOf(at) {
      const [c, r] = [Math.floor(column[at]), Math.floor(row[at])];
      return c >= 0 && c < nx && r >= 0 && r < ny ? r * nx + c : -1;
    },
  };
}

/**
 * The source columns (or rows) whose centres can lie in the grid: those that the grid's cell centres reach, and half a
 * grid cell more on either side.
 *
 * @param along - where each of the grid's cell centres lies, shape [ny * gridNx]
 */
function reached(along: Float64Array, count: number, gridNx: number): { from: number; to: number } {
  let [least, most, widest] = [Infinity, -Infinity, 0];
  for (const [cell, value] of along.entries()) {
    if (!Number.isFinite(value)) continue;
    least = Math.min(least, value);
    most = Math.max(most, value);
    const neighbours = [cell % gridNx === 0 ? undefined : along[cell - 1], along[cell - gridNx]];
    for (const other of neighbours) {
      // A jump of half the source is a seam of longitudes and no width of a cell.
      const step = Math.abs(value - (other ?? value));
      if (step < count / 2) widest = Math.max(widest, step);
    }
  }
  if (least > most) return { from: 0, to: 0 };
  const pad = widest + 1;
  const from = Math.max(0, Math.floor(least - pad));
  return { from, to: Math.max(from, Math.min(count, Math.ceil(most + pad))) };
}

function toLonLat(map: Projection, x: number, y: number): readonly [number, number] {
  return map.geographic ? [x > 180 ? x - 360 : x, y] : map.inverse(x, y);
}

function fromLonLat(map: Projection, lonDeg: number, latDeg: number): readonly [number, number] {
  return map.geographic ? [lonDeg, latDeg] : map.forward(lonDeg, latDeg);
}

function positionedCells(
  grid: Grid,
  map: Projection,
  source: SourceCells & { readonly kind: "positions" },
): Matched {
  const { nx, ny, lonDeg, latDeg } = source;
  const [x, y] = [new Float64Array(nx * ny), new Float64Array(nx * ny)];
  const cell = new Int32Array(nx * ny);
  for (let k = 0; k < cell.length; k++) {
    [x[k], y[k]] = map.forward(lonDeg[k] > 180 ? lonDeg[k] - 360 : lonDeg[k], latDeg[k]);
    cell[k] = cellIndexAt(grid, x[k], y[k]);
  }
  // Cells are asked for one after another, so the walk to the nearest source cell starts near its end.
  let last = Math.floor(ny / 2) * nx + Math.floor(nx / 2);
  return {
    cellOfSource: { cell, indexOf: (k) => k },
    holderOf(at) {
      const { xM, yM } = cellCentre(grid, at);
      last = walkToNearest(x, y, nx, ny, last, xM, yM);
      return liesInside(x, y, nx, ny, last, xM, yM) ? last : -1;
    },
  };
}

/** From neighbour to neighbour downhill in distance: places of a grid bend, but never fold. */
function walkToNearest(
  x: Float64Array,
  y: Float64Array,
  nx: number,
  ny: number,
  from: number,
  xM: number,
  yM: number,
): number {
  const distance = (k: number) => Math.hypot(x[k] - xM, y[k] - yM);
  let at = from;
  for (let best = distance(at); ; ) {
    const [column, row, before] = [at % nx, Math.floor(at / nx), at];
    for (let r = Math.max(0, row - 1); r <= Math.min(ny - 1, row + 1); r++) {
      for (let c = Math.max(0, column - 1); c <= Math.min(nx - 1, column + 1); c++) {
        const other = distance(r * nx + c);
        if (other < best) [best, at] = [other, r * nx + c];
      }
    }
    if (at === before) return at;
  }
}

/** Whether a point lies within half a cell of a source cell's centre, along its columns and along its rows. */
function liesInside(
  x: Float64Array,
  y: Float64Array,
  nx: number,
  ny: number,
  at: number,
  xM: number,
  yM: number,
): boolean {
  const column = at % nx;
  const [east, south] = [column + 1 < nx ? 1 : -1, at + nx < nx * ny ? nx : -nx];
  if (nx < 2 || ny < 2) return false;
  const [ax, ay] = [x[at + east] - x[at], y[at + east] - y[at]];
  const [bx, by] = [x[at + south] - x[at], y[at + south] - y[at]];
  const [px, py] = [xM - x[at], yM - y[at]];
  const area = ax * by - ay * bx;
  const along = (px * by - py * bx) / area;
  const across = (ax * py - ay * px) / area;
  return Math.abs(along) <= 0.5 + 1e-9 && Math.abs(across) <= 0.5 + 1e-9;
}
