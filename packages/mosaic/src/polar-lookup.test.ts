import { arcDistanceM, beamHeightM, cellIndexAt, effectiveRadiusM, type Grid } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { geodesicDirect, geodesicInverse } from "./geodesic.ts";
import { planGrid } from "./plan-grid.ts";
import { type LookupRules, polarLookup, type SweepGeometry } from "./polar-lookup.ts";
import { projection } from "./projection.ts";
import { siteCells } from "./site-cells.ts";

const site = { id: "invented", lonDeg: 3.21, latDeg: 52.04, antennaHeightM: 80 };
const crs = "+proj=laea +lat_0=52 +lon_0=3 +x_0=0 +y_0=0 +ellps=GRS80 +units=m +no_defs";
const map = projection(crs);
const grid: Grid = { crs, westM: -90_000, northM: 100_000, cellM: 1000, nx: 180, ny: 190 };
const open: LookupRules = {
  effectiveRadiusFactor: 4 / 3,
  maxBeamHeightM: 20_000,
  taperM: 10_000,
  blockedSectors: [],
};

function fan(rays: number, gates: number, gateLengthM: number, elevationDeg = 0.5): SweepGeometry {
  return {
    site,
    elevationDeg,
    azimuthDeg: Float64Array.from({ length: rays }, (_, ray) => ((ray + 0.5) * 360) / rays),
    gateCount: gates,
    firstGateCentreM: gateLengthM / 2,
    gateLengthM,
    beamWidthDeg: 1,
  };
}

const cells = siteCells(grid, map, site);

describe("siteCells", () => {
  test("interpolated distances stay within 0.1 m of the geodesic, azimuths within 1e-4 degree away from the site", () => {
    for (let cell = 7; cell < grid.nx * grid.ny; cell += 1237) {
      const [column, row] = [cell % grid.nx, Math.floor(cell / grid.nx)];
      const [lonDeg, latDeg] = map.inverse(
        grid.westM + (column + 0.5) * 1000,
        grid.northM - (row + 0.5) * 1000,
      );
      const exact = geodesicInverse(site, { lonDeg, latDeg });
      expect(Math.abs(cells.distanceM[cell] - exact.distanceM)).toBeLessThan(0.1);
      if (exact.distanceM < 5000) continue;
      const off = Math.abs(((cells.azimuthDeg[cell] - exact.azimuthDeg + 540) % 360) - 180);
      expect(off).toBeLessThan(2e-4);
    }
  });
});

describe("polarLookup", () => {
  test("each gate lies in the cell that holds its own geodesic position", () => {
    const geometry = fan(360, 160, 500);
    const lookup = polarLookup(grid, map, cells, geometry, open);
    const radiusM = effectiveRadiusM(4 / 3);
    const cellOf = new Map<number, number>();
    for (let at = 0; at < lookup.cells.length; at++) {
      for (let k = lookup.start[at]; k < lookup.start[at + 1]; k++)
        cellOf.set(lookup.gates[k], lookup.cells[at]);
    }
    let checked = 0;
    for (let gate = 3; gate < 360 * 160; gate += 977) {
      const [ray, along] = [Math.floor(gate / 160), gate % 160];
      const arcM = arcDistanceM(250 + along * 500, 0.5, radiusM);
      const { lonDeg, latDeg } = geodesicDirect(site, geometry.azimuthDeg[ray], arcM);
      const [x, y] = map.forward(lonDeg, latDeg);
      // A position within a metre of a border may fall on either side.
      const toBorder = Math.min(...[x, y].map((v) => Math.abs(v / 1000 - Math.round(v / 1000)) * 1000));
      if (toBorder < 1) continue;
      expect(cellOf.get(gate) ?? -1).toBe(cellIndexAt(grid, x, y));
      checked++;
    }
    expect(checked).toBeGreaterThan(40);
  });

  test("leaves no holes inside its reach: far cells without a gate centre take the nearest gate", () => {
    const lookup = polarLookup(grid, map, cells, fan(360, 100, 1000), open);
    for (let cell = 0; cell < grid.nx * grid.ny; cell++) {
      if (cells.distanceM[cell] < 98_000) expect(lookup.position[cell]).toBeGreaterThanOrEqual(0);
    }
  });

  test("speaks nowhere beyond its last gate", () => {
    const lookup = polarLookup(grid, map, cells, fan(360, 50, 1000), open);
    for (const cell of lookup.cells) expect(cells.distanceM[cell]).toBeLessThan(50_800);
    expect(lookup.coverageM).toBeLessThan(50_000);
  });

  test("speaks nowhere above the height limit, and its coverage ends there", () => {
    const lookup = polarLookup(grid, map, cells, fan(360, 120, 1000, 1.5), { ...open, maxBeamHeightM: 1500 });
    const radiusM = effectiveRadiusM(4 / 3);
    for (const cell of lookup.cells) expect(lookup.beamHeightAslM[cell]).toBeLessThanOrEqual(1580.001);
    // Doviak and Zrnic (1993) eq. 2.28b, by the core function that the published values are held against.
    expect(beamHeightM(lookup.coverageM * 1.0005, 1.5, radiusM)).toBeCloseTo(1500, -1);
  });

  test("a blocked sector that wraps over north is silent up to its elevation, and only there", () => {
    const rules = {
      ...open,
      blockedSectors: [{ fromAzimuthDeg: 350, toAzimuthDeg: 20, upToElevationDeg: 0.7 }],
    };
    const low = polarLookup(grid, map, cells, fan(360, 90, 1000, 0.5), rules);
    const high = polarLookup(grid, map, cells, fan(360, 90, 1000, 1.2), rules);
    const inSector = (cell: number) => cells.azimuthDeg[cell] >= 350 || cells.azimuthDeg[cell] <= 20;
    expect([...low.cells].some(inSector)).toBe(false);
    expect([...high.cells].some(inSector)).toBe(true);
    expect([...low.cells].some((cell) => cells.azimuthDeg[cell] > 170)).toBe(true);
  });

  test("a sector from 0 to 360 is all around, one from 90 to 90 a single azimuth", () => {
    const block = (fromAzimuthDeg: number, toAzimuthDeg: number) =>
      polarLookup(grid, map, cells, fan(360, 90, 1000), {
        ...open,
        blockedSectors: [{ fromAzimuthDeg, toAzimuthDeg, upToElevationDeg: 0.7 }],
      }).cells.length;
    expect(block(0, 360)).toBe(0);
    expect(block(90, 90)).toBeGreaterThan(20_000);
  });

  test("a sweep of a few rays speaks for its sector and half a beam beside it, not for what it never looked at", () => {
    // Ten rays of a degree, from 40.5 to 49.5: they see 40 to 50 degrees. A cell that holds a gate centre has
    // its own centre at most 707 m beside the ray, less than 1.1 degrees from 40 km on.
    const few = {
      ...fan(360, 90, 1000),
      azimuthDeg: Float64Array.from({ length: 10 }, (_, ray) => 40.5 + ray),
    };
    const spoken = [...polarLookup(grid, map, cells, few, open).cells].filter(
      (cell) => cells.distanceM[cell] > 40_000,
    );
    expect(spoken.length).toBeGreaterThan(400);
    for (const cell of spoken) {
      expect(cells.azimuthDeg[cell]).toBeGreaterThan(39.4);
      expect(cells.azimuthDeg[cell]).toBeLessThan(50.6);
    }
  });

  test("half-degree rays and whole-degree rays cover the same cells but for the rim", () => {
    const inside = (rays: number) =>
      [...polarLookup(grid, map, cells, fan(rays, 90, 1000), open).cells].filter(
        (cell) => cells.distanceM[cell] < 89_000,
      );
    expect(inside(720)).toEqual(inside(360));
  });

  test("works across 180 degrees", () => {
    const far = { id: "invented", lonDeg: 179.9, latDeg: -17, antennaHeightM: 20 };
    const farGrid = planGrid([{ lonDeg: -179.8, latDeg: -17 }], { marginM: 20_000, cellM: 1000 });
    const farMap = projection(farGrid.crs);
    const lookup = polarLookup(
      farGrid,
      farMap,
      siteCells(farGrid, farMap, far),
      { ...fan(360, 100, 1000), site: far },
      open,
    );
    expect(lookup.cells.length).toBeGreaterThan(1000);
  });
});
