import { RAIN_TYPE, RAIN_TYPE_DEFAULTS, type RainTypeSettings, rainTypes } from "@rainreckon/core";
import type { CellLookup } from "./rate-layer.ts";

/** Points of the paper; a finer grid is taken together to about this. */
const TYPE_CELL_M = 2000;

/**
 * Convective and stratiform rain of a sweep, gate by gate.
 *
 * The gates' Z is averaged over squares of about 2 km of a map grid (a coarser grid is taken as it is), the
 * squares are told apart by `rainTypes`, and each gate with echo takes the type of its square. A gate that
 * lies in two, as gates far out may, is convective where one of them is.
 *
 * @param lookup - of this sweep geometry on the grid
 * @param grid - the shape of that grid
 * @param dbz - shape [rayCount * gateCount]; -Infinity below detection, which counts as Z = 0 in the mean of a
 *   square; NaN not observed, which does not count
 * @returns shape [rayCount * gateCount], numbers of `RAIN_TYPE`; 0 where there is no echo and outside the grid
 */
export function rainTypeOfGates(
  lookup: CellLookup,
  grid: { readonly nx: number; readonly ny: number; readonly cellM: number },
  dbz: Float32Array,
  settings: RainTypeSettings = RAIN_TYPE_DEFAULTS,
): Uint8Array {
  const together = Math.max(1, Math.round(TYPE_CELL_M / grid.cellM));
  const nx = Math.ceil(grid.nx / together);
  const ny = Math.ceil(grid.ny / together);
  const { cells, start, gates } = lookup;

  const squareOf = new Int32Array(cells.length);
  const sum = new Float64Array(nx * ny);
  const count = new Int32Array(nx * ny);
  const perDb = Math.LN10 / 10;
  for (let at = 0; at < cells.length; at++) {
    const column = cells[at] % grid.nx;
    const row = (cells[at] - column) / grid.nx;
    const square = Math.floor(row / together) * nx + Math.floor(column / together);
    squareOf[at] = square;
    for (let k = start[at]; k < start[at + 1]; k++) {
      const value = dbz[gates[k]];
      if (Number.isNaN(value)) continue;
      count[square]++;
      if (value > Number.NEGATIVE_INFINITY) sum[square] += Math.exp(value * perDb);
    }
  }
  const gridDbz = new Float64Array(nx * ny);
  for (let square = 0; square < gridDbz.length; square++) {
    gridDbz[square] = count[square] === 0 ? Number.NaN : 10 * Math.log10(sum[square] / count[square]);
  }

  const types = rainTypes(gridDbz, { nx, ny, cellM: together * grid.cellM }, settings);
  const ofGates = new Uint8Array(dbz.length);
  for (let at = 0; at < cells.length; at++) {
    const type = types[squareOf[at]];
    if (type === RAIN_TYPE.none) continue;
    for (let k = start[at]; k < start[at + 1]; k++) {
      const gate = gates[k];
      if (dbz[gate] > Number.NEGATIVE_INFINITY && ofGates[gate] !== RAIN_TYPE.convective)
        ofGates[gate] = type;
    }
  }
  return ofGates;
}
