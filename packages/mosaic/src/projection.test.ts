import { execFileSync } from "node:child_process";
import { describe, expect, test } from "vitest";
import { planGrid } from "./plan-grid.ts";
import { projection, projStringOf } from "./projection.ts";

const foreign = process.env.RAINRECKON_FOREIGN_TOOLS === "1";

describe("projection", () => {
  // IOGP Geomatics Guidance Note 7-2 (from memory), Lambert Azimuthal Equal Area, ETRS89-LAEA example:
  // 50°N 5°E is E 3962799.45 m, N 2999718.85 m.
  test("EPSG:3035 puts 50 N 5 E where the guidance note has it", () => {
    const [x, y] = projection("EPSG:3035").forward(5, 50);
    expect(Math.abs(x - 3962799.45)).toBeLessThan(0.01);
    expect(Math.abs(y - 2999718.85)).toBeLessThan(0.01);
  });

  test.each([
    ["EPSG:3035", 9.5, 47.25],
    ["EPSG:25832", 11.2, 51.9],
    ["EPSG:32755", 145.3, -37.8],
    ["EPSG:3857", -3.7, 40.4],
    ["+proj=laea +lat_0=52 +lon_0=4 +x_0=0 +y_0=0 +ellps=GRS80 +units=m +no_defs", 5.9, 50.7],
    ["+proj=stere +lat_0=90 +lat_ts=60 +lon_0=10 +ellps=WGS84 +units=m +no_defs", 22, 61],
  ])("goes there and back: %s", (crs, lonDeg, latDeg) => {
    const map = projection(crs);
    const [x, y] = map.forward(lonDeg, latDeg);
    const [lon, lat] = map.inverse(x, y);
    expect(Math.hypot(lon - lonDeg, lat - latDeg)).toBeLessThan(1e-8);
  });

  // Expected: cs2cs of PROJ 9.1 for 3.1 E 52.6 N, from +proj=longlat +datum=WGS84.
  test.each([
    ["+proj=laea +lat_0=52.5 +lon_0=3 +ellps=GRS80 +units=m", 6775.6177, 11132.4468],
    ["+proj=aea +lat_1=40 +lat_2=50 +lat_0=45 +lon_0=3 +ellps=GRS80 +units=m", 6814.8719, 845861.2795],
  ])("takes a false origin of 0 where none is named: %s", (crs, xM, yM) => {
    const [x, y] = projection(crs).forward(3.1, 52.6);
    expect(Math.hypot(x - xM, y - yM)).toBeLessThan(0.002);
  });

  test.skipIf(!foreign)("agrees with PROJ's own program to 2 mm (RAINRECKON_FOREIGN_TOOLS)", () => {
    const crs = "+proj=laea +lat_0=52 +lon_0=4 +x_0=0 +y_0=0 +ellps=GRS80 +units=m +no_defs";
    const map = projection(crs);
    const points = [];
    for (let lat = 49; lat <= 55; lat += 1.5) for (let lon = 0; lon <= 8; lon += 2) points.push([lon, lat]);
    const input = points.map(([lon, lat]) => `${lon} ${lat}`).join("\n");
    const output = execFileSync("proj", ["-f", "%.4f", ...crs.split(" ")], { input, encoding: "utf8" });
    const lines = output.trim().split("\n");
    expect(lines).toHaveLength(points.length);
    for (const [k, line] of lines.entries()) {
      const [x, y] = line.split(/\s+/).map(Number);
      const [ownX, ownY] = map.forward(points[k][0], points[k][1]);
      expect(Math.hypot(ownX - x, ownY - y)).toBeLessThan(0.002);
    }
  });

  test("knows a system by its URN, and CRS84", () => {
    expect(projStringOf("urn:ogc:def:crs:EPSG::25832")).toBe(projStringOf("EPSG:25832"));
    expect(projection("urn:ogc:def:crs:OGC:1.3:CRS84").geographic).toBe(true);
  });

  test.each([
    ["EPSG:27700", /shift grid/],
    ["EPSG:999999", /not in the register/],
    ["British grid", /neither an EPSG code nor a PROJ string/],
    ["EPSG:../../etc/passwd", /neither/],
  ])("refuses %s and says why", (crs, message) => {
    expect(() => projection(crs)).toThrow(message);
  });
});

describe("planGrid", () => {
  test("snaps to whole cells, keeps the margin, and centres on a tenth of a degree", () => {
    const points = [
      { lonDeg: 3.12, latDeg: 51.87 },
      { lonDeg: 3.9, latDeg: 52.31 },
    ];
    const grid = planGrid(points, { marginM: 10_000, cellM: 1000 });
    expect(grid.crs).toContain("+lat_0=52.1 +lon_0=3.5 ");
    expect(Math.abs(grid.westM % 1000)).toBe(0);
    expect(Math.abs(grid.northM % 1000)).toBe(0);
    const map = projection(grid.crs);
    for (const { lonDeg, latDeg } of points) {
      const [x, y] = map.forward(lonDeg, latDeg);
      expect(x - grid.westM).toBeGreaterThanOrEqual(10_000);
      expect(grid.westM + grid.nx * 1000 - x).toBeGreaterThanOrEqual(10_000);
      expect(grid.northM - y).toBeGreaterThanOrEqual(10_000);
      expect(y - (grid.northM - grid.ny * 1000)).toBeGreaterThanOrEqual(10_000);
    }
  });

  test("keeps a district together that lies across 180 degrees", () => {
    const grid = planGrid(
      [
        { lonDeg: 179.8, latDeg: -17 },
        { lonDeg: -179.9, latDeg: -17.2 },
      ],
      { marginM: 10_000, cellM: 1000 },
    );
    expect(grid.nx).toBeLessThan(60);
  });
});
