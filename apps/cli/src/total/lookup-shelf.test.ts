import type { Grid, Sweep } from "@rainreckon/core";
import { expect, test } from "vitest";
import type { JobRadar } from "./job.ts";
import { lookupShelf } from "./lookup-shelf.ts";

const grid: Grid = {
  crs: "+proj=laea +lat_0=52 +lon_0=3 +ellps=GRS80 +units=m",
  westM: -2000,
  northM: 2000,
  cellM: 1000,
  nx: 4,
  ny: 4,
};

/** What a shelf looks at of a radar. */
function invented(): JobRadar {
  return {
    site: { id: "zzeve", lonDeg: 3.1, latDeg: 52, antennaHeightM: 50 },
    beamWidthDeg: 1,
    lookup: { effectiveRadiusFactor: 4 / 3, maxBeamHeightM: 3000, taperM: 10_000, blockedSectors: [] },
  } as unknown as JobRadar;
}

/** What a shelf looks at of a sweep. */
function sweepAt(elevationDeg: number, azimuthOffsetDeg = 0.5): Sweep {
  return {
    elevationDeg,
    gateCount: 20,
    firstGateCentreM: 500,
    gateLengthM: 1000,
    azimuthDeg: Float64Array.from({ length: 36 }, (_, ray) => ray * 10 + azimuthOffsetDeg),
  } as unknown as Sweep;
}

test("a volume of twenty elevations is looked up once, round after round", () => {
  const shelf = lookupShelf(grid, invented());
  const volume = () => Array.from({ length: 20 }, (_, k) => shelf.forSweep(sweepAt(0.5 + k)));
  const first = volume();
  expect(new Set(first).size).toBe(20);
  for (const [k, lookup] of volume().entries()) expect(lookup).toBe(first[k]);
});

test("rays that wander for ever push out what was not wanted for longest, not the elevation in use", () => {
  const shelf = lookupShelf(grid, invented());
  const steady = shelf.forSweep(sweepAt(0.5));
  for (let k = 0; k < 100; k++) {
    shelf.forSweep(sweepAt(1.5, 1 + k * 0.05));
    expect(shelf.forSweep(sweepAt(0.5))).toBe(steady);
  }
});
