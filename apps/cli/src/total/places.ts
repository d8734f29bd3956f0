import { type CellFractions, cellFractions, cellsForPoint } from "@rainreckon/accumulation";
import { type Catchment, cellIndexAt, type Grid, InputError, type Ring } from "@rainreckon/core";
import { type Projection, projectArea } from "@rainreckon/mosaic";
import type { LeftOutLog } from "../ui/left-out.ts";

/** What to do about a place beyond the grid: `plan --update` leaves the grid alone, for every figure stands on it. */
export const WIDEN_GRID = "widen the grid in the plan (westM, northM, nx, ny)";

/** A catchment on the grid. */
export interface PlacedCatchment {
  readonly id: string;
  readonly name: string;
  /** In the grid's coordinates, metres. */
  readonly polygons: readonly (readonly Ring[])[];
  readonly cells: CellFractions;
  readonly areaKm2: number;
}

/**
 * Puts catchments on the grid; one that lies outside it, or whose coordinate system is not known, is left
 * out and named, one that reaches beyond it is kept and named.
 */
export function placeCatchments(
  catchments: readonly Catchment[],
  grid: Grid,
  map: Projection,
  file: string,
  log: LeftOutLog,
): PlacedCatchment[] {
  const placed: PlacedCatchment[] = [];
  for (const catchment of catchments) {
    const where = `${file}, catchment ${catchment.id}`;
    let polygons: Ring[][];
    try {
      polygons = projectArea(catchment, map, grid.cellM / 2).onMap;
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      log.add("catchment left out", { what: error.what, where, fix: error.fix });
      continue;
    }
    const cells = cellFractions(grid, polygons);
    if (cells.cells.length === 0) {
      log.add("catchment left out", {
        what: "it lies outside the grid",
        where,
        fix: `${WIDEN_GRID}, or check its coordinates`,
      });
      continue;
    }
    if (cells.insideGrid < 0.999) {
      log.add("catchment partly outside", {
        what: `${(100 * (1 - cells.insideGrid)).toFixed(0)} % of it lies outside the grid and counts as not observed`,
        where,
        fix: WIDEN_GRID,
      });
    }
    placed.push({ id: catchment.id, name: catchment.name, polygons, cells, areaKm2: cells.areaM2 / 1e6 });
  }
  return placed;
}

/** The area that the headline speaks of: all catchments together, each place counted once. */
export function unionOfAreas(placed: readonly PlacedCatchment[], grid: Grid): CellFractions {
  const share = new Map<number, number>();
  for (const { cells } of placed) {
    for (let k = 0; k < cells.cells.length; k++) {
      const cell = cells.cells[k];
      share.set(cell, Math.min(1, (share.get(cell) ?? 0) + cells.fraction[k]));
    }
  }
  const sorted = [...share].sort((a, b) => a[0] - b[0]);
  const fraction = Float64Array.from(sorted, ([, value]) => value);
  const insideM2 = fraction.reduce((sum, value) => sum + value, 0) * grid.cellM * grid.cellM;
  const wholeM2 = placed.reduce((sum, { cells }) => sum + cells.areaM2, 0);
  const gridM2 = placed.reduce((sum, { cells }) => sum + cells.areaM2 * cells.insideGrid, 0);
  return {
    cells: Int32Array.from(sorted, ([cell]) => cell),
    fraction,
    areaM2: insideM2,
    insideGrid: wholeM2 > 0 ? gridM2 / wholeM2 : 0,
  };
}

/** Every cell of the grid, whole: what the headline speaks of where there are no catchments. */
export function wholeGrid(grid: Grid): CellFractions {
  const count = grid.nx * grid.ny;
  return {
    cells: Int32Array.from({ length: count }, (_, cell) => cell),
    fraction: new Float64Array(count).fill(1),
    areaM2: count * grid.cellM * grid.cellM,
    insideGrid: 1,
  };
}

/** The cell that holds a position, -1 outside the grid, and the cells that stand for it. */
export function placePoint(
  grid: Grid,
  map: Projection,
  point: { readonly lonDeg: number; readonly latDeg: number },
  rule: "nearest" | "mean3x3",
): { readonly cell: number; readonly cells: readonly number[]; readonly xM: number; readonly yM: number } {
  const [xM, yM] = map.forward(point.lonDeg, point.latDeg);
  const cell = cellIndexAt(grid, xM, yM);
  return { cell, cells: cellsForPoint(grid, cell, rule), xM, yM };
}
