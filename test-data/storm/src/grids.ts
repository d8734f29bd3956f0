import type { RadarPlan } from "./radar.ts";
import type { Lattice } from "./weather.ts";

/** True rain rates are stored in steps of this many mm/h. */
export const TRUTH_RATE_STEP_MM_PER_HOUR = 0.05;

/** The truth grid: square cells of 1 km in the equal-area plane, as many as the district is wide. */
export interface TruthGrid {
  readonly crs: string;
  readonly westM: number;
  readonly northM: number;
  readonly cellM: number;
  readonly nx: number;
  readonly ny: number;
}

/** @param sizeKm - side of the district, an even whole number of kilometres */
export function truthGrid(crs: string, sizeKm: number): TruthGrid {
  if (!Number.isInteger(sizeKm / 2) || sizeKm < 20) {
    throw new RangeError(`sizeKm must be an even whole number from 20, got ${sizeKm}`);
  }
  return { crs, westM: -sizeKm * 500, northM: sizeKm * 500, cellM: 1000, nx: sizeKm, ny: sizeKm };
}

/** The lattice that the weather is worked out on: cell centres of the truth grid, on to where the radars reach. */
export function weatherLattice(sizeKm: number, radars: readonly RadarPlan[]): Lattice {
  let west = -sizeKm / 2;
  let east = sizeKm / 2;
  let south = west;
  let north = east;
  for (const radar of radars) {
    const reachKm = (radar.gateM * radar.gateCount) / 1000 + 3;
    west = Math.min(west, Math.floor(radar.xKm - reachKm));
    east = Math.max(east, Math.ceil(radar.xKm + reachKm));
    south = Math.min(south, Math.floor(radar.yKm - reachKm));
    north = Math.max(north, Math.ceil(radar.yKm + reachKm));
  }
  return { westKm: west + 0.5, southKm: south + 0.5, nx: east - west, ny: north - south };
}

/** Copies the truth grid's cells out of the lattice: rows turn from south-first to north-first. */
export function cutTruth(values: Float32Array, lattice: Lattice, grid: TruthGrid, into: Float32Array): void {
  const firstColumn = grid.westM / 1000 + 0.5 - lattice.westKm;
  const northRow = grid.northM / 1000 - 0.5 - lattice.southKm;
  for (let row = 0; row < grid.ny; row++) {
    const from = (northRow - row) * lattice.nx + firstColumn;
    into.set(values.subarray(from, from + grid.nx), row * grid.nx);
  }
}
