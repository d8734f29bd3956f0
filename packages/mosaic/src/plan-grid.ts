import type { Grid } from "@rainreckon/core";
import { projection } from "./projection.ts";

/** Largest number of cells a planned grid may have; above it the plan must be told what is wanted. */
export const MAX_GRID_CELLS = 16_000_000;

/**
 * A grid around points of interest: Lambert azimuthal equal-area on GRS 80, its centre rounded to a
 * tenth of a degree, its edges snapped outward to whole cells.
 *
 * Equal area, so that a depth times a cell count is a volume; the numbers go into the plan so that
 * no rerun moves the grid.
 *
 * @param points - WGS 84 positions, at least one
 * @param options - margin kept free around the points and cell size, metres
 * @throws RangeError without points, or when the grid would exceed {@link MAX_GRID_CELLS}
 */
export function planGrid(
  points: readonly { readonly lonDeg: number; readonly latDeg: number }[],
  options: { readonly marginM: number; readonly cellM: number },
): Grid {
  const first = points[0];
  if (first === undefined) throw new RangeError("a grid needs at least one point to lie around");
  let [minLat, maxLat, minDLon, maxDLon] = [90, -90, 360, -360];
  for (const { lonDeg, latDeg } of points) {
    // Longitudes are taken relative to the first point, so that a district across 180° stays together.
    const dLon = ((lonDeg - first.lonDeg + 540) % 360) - 180;
    minLat = Math.min(minLat, latDeg);
    maxLat = Math.max(maxLat, latDeg);
    minDLon = Math.min(minDLon, dLon);
    maxDLon = Math.max(maxDLon, dLon);
  }
  const lat0 = Math.round(5 * (minLat + maxLat)) / 10;
  const rawLon0 = first.lonDeg + (minDLon + maxDLon) / 2;
  const lon0 = Math.round(10 * (((rawLon0 + 540) % 360) - 180)) / 10;
  const crs = `+proj=laea +lat_0=${lat0} +lon_0=${lon0} +x_0=0 +y_0=0 +ellps=GRS80 +units=m +no_defs`;
  const { forward } = projection(crs);
  let [west, east, south, north] = [Infinity, -Infinity, Infinity, -Infinity];
  for (const { lonDeg, latDeg } of points) {
    const [x, y] = forward(lonDeg, latDeg);
    west = Math.min(west, x);
    east = Math.max(east, x);
    south = Math.min(south, y);
    north = Math.max(north, y);
  }
  const { marginM, cellM } = options;
  const westM = Math.floor((west - marginM) / cellM) * cellM;
  const northM = Math.ceil((north + marginM) / cellM) * cellM;
  const nx = Math.ceil((east + marginM - westM) / cellM);
  const ny = Math.ceil((northM - (south - marginM)) / cellM);
  if (nx * ny > MAX_GRID_CELLS) {
    throw new RangeError(`a grid of ${nx} × ${ny} cells of ${cellM} m is too large; choose larger cells`);
  }
  return { crs, westM, northM, cellM, nx: Math.max(1, nx), ny: Math.max(1, ny) };
}
