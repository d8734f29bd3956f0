import type { Grid, Sweep, SweepHeader } from "@rainreckon/core";
import {
  type PolarLookup,
  type Projection,
  polarLookup,
  projection,
  type SiteCells,
  siteCells,
} from "@rainreckon/mosaic";
import type { JobRadar } from "./job.ts";

/**
 * Lookups kept per radar: more than the largest volumes have elevations. With one fewer than a volume needs, each
 * would be thrown out just before it is wanted again. Where rays wander, each scan adds one, so there is an end to it.
 */
const KEPT_PER_RADAR = 32;
/** Rays this near to a regular fan are taken to be it, so that an antenna's jitter does not cost a lookup a scan. */
const FAN_SLACK_DEG = 0.15;
/** Otherwise azimuths are rounded to this: 90 m at 100 km. Rounding, not the first scan seen, makes the lookup. */
const AZIMUTH_STEP_DEG = 0.05;

/** Lookups of one radar on one grid, built once per geometry. */
export interface LookupShelf {
  /** @param sweep - only its geometry is looked at */
  forSweep(sweep: SweepHeader & Pick<Sweep, "azimuthDeg">): PolarLookup;
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
      const azimuthDeg = settledAzimuths(sweep.azimuthDeg);
      const key = [
        sweep.elevationDeg.toFixed(2),
        sweep.gateCount,
        sweep.firstGateCentreM,
        sweep.gateLengthM,
        azimuthDeg.join(),
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
            elevationDeg: Number(sweep.elevationDeg.toFixed(2)),
            azimuthDeg,
            gateCount: sweep.gateCount,
            firstGateCentreM: sweep.firstGateCentreM,
            gateLengthM: sweep.gateLengthM,
            beamWidthDeg: radar.beamWidthDeg,
          },
          radar.lookup,
        );
        if (lookups.size >= KEPT_PER_RADAR) lookups.delete(lookups.keys().next().value as string);
      } else {
        lookups.delete(key);
      }
      // The one asked for last stands last, so that the first is the one not asked for longest.
      lookups.set(key, lookup);
      return lookup;
    },
  };
}

/** The azimuths that a lookup is built for: a regular fan where the rays are one, else rounded. Ascending. */
function settledAzimuths(azimuthDeg: Float64Array): Float64Array {
  const spacing = 360 / azimuthDeg.length;
  for (const first of [0, spacing / 2]) {
    if (azimuthDeg.every((azimuth, ray) => Math.abs(azimuth - first - ray * spacing) <= FAN_SLACK_DEG)) {
      return azimuthDeg.map((_, ray) => first + ray * spacing);
    }
  }
  return azimuthDeg.map((azimuth) => Math.round(azimuth / AZIMUTH_STEP_DEG) * AZIMUTH_STEP_DEG);
}
