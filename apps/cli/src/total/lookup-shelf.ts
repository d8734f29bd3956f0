import type { Grid, Sweep } from "@rainreckon/core";
import {
  type PolarLookup,
  type Projection,
  polarLookup,
  projection,
  type SiteCells,
  siteCells,
} from "@rainreckon/mosaic";
import type { JobRadar } from "./job.ts";

/** Lookups kept per radar; a radar has a handful of elevations, each with one geometry unless its rays wander. */
const KEPT_PER_RADAR = 16;
/** Azimuths that differ by less share a lookup: a twentieth of a degree is 90 m at 100 km. */
const AZIMUTH_STEP_DEG = 0.1;

/** Lookups of one radar on one grid, built once per geometry. */
export interface LookupShelf {
  /** @param sweep - only its geometry is looked at */
  forSweep(sweep: Sweep): PolarLookup;
}

const maps = new Map<string, Projection>();
const shelves = new WeakMap<JobRadar, LookupShelf>();

/** The shelf of a radar; it lives as long as the job that the radar belongs to, over all units of a worker. */
export function lookupShelf(grid: Grid, radar: JobRadar): LookupShelf {
  const known = shelves.get(radar);
  if (known !== undefined) return known;
  const shelf = buildShelf(grid, radar);
  shelves.set(radar, shelf);
  return shelf;
}

function buildShelf(grid: Grid, radar: JobRadar): LookupShelf {
  let map = maps.get(grid.crs);
  if (map === undefined) {
    map = projection(grid.crs);
    maps.set(grid.crs, map);
  }
  const gridMap = map;
  let cells: SiteCells | undefined;
  const lookups = new Map<string, PolarLookup>();
  return {
    forSweep(sweep) {
      const azimuthKey = Array.from(sweep.azimuthDeg, (azimuth) =>
        Math.round(azimuth / AZIMUTH_STEP_DEG),
      ).join();
      const key = [
        sweep.elevationDeg.toFixed(2),
        sweep.gateCount,
        sweep.firstGateCentreM,
        sweep.gateLengthM,
        azimuthKey,
      ].join("|");
      let lookup = lookups.get(key);
      if (lookup === undefined) {
        cells ??= siteCells(grid, gridMap, radar.site);
        lookup = polarLookup(
          grid,
          gridMap,
          cells,
          {
            site: radar.site,
            elevationDeg: sweep.elevationDeg,
            azimuthDeg: sweep.azimuthDeg.map(
              (azimuth) => Math.round(azimuth / AZIMUTH_STEP_DEG) * AZIMUTH_STEP_DEG,
            ),
            gateCount: sweep.gateCount,
            firstGateCentreM: sweep.firstGateCentreM,
            gateLengthM: sweep.gateLengthM,
            beamWidthDeg: radar.beamWidthDeg,
          },
          radar.lookup,
        );
        if (lookups.size >= KEPT_PER_RADAR) lookups.delete(lookups.keys().next().value as string);
        lookups.set(key, lookup);
      }
      return lookup;
    },
  };
}
