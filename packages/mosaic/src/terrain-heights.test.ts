import type { TerrainGrid } from "@rainreckon/core";
import { expect, test } from "vitest";
import { terrainAlongRays, terrainHeights } from "./terrain-heights.ts";

/** A model whose heights are a plane: 10 m a column, 100 m a row, measured at cell centres. */
function plane(over: Partial<TerrainGrid> = {}): TerrainGrid {
  const [nx, ny] = [40, 20];
  return {
    crs: "EPSG:4326",
    west: 2,
    north: 53,
    cellWidth: 0.05,
    cellHeight: 0.1,
    nx,
    ny,
    heightAslM: Float32Array.from(
      { length: nx * ny },
      (_, cell) => 10 * (cell % nx) + 100 * Math.floor(cell / nx),
    ),
    unknownCells: 0,
    ...over,
  };
}

test("between centres a plane is a plane, by hand", () => {
  const heightAt = terrainHeights(plane());
  // The centre of column 3, row 2; then half a column east; then a quarter of a row south.
  expect(heightAt(2.175, 52.75)).toBeCloseTo(230, 3);
  expect(heightAt(2.2, 52.75)).toBeCloseTo(235, 3);
  expect(heightAt(2.2, 52.725)).toBeCloseTo(260, 3);
  // Beyond the outermost centre the outermost row and column hold; beyond the edge nothing does.
  expect(heightAt(2.001, 52.999)).toBeCloseTo(0, 3);
  expect(heightAt(1.999, 52.5)).toBeNaN();
  expect(heightAt(3, 53.001)).toBeNaN();
});

test("beside a cell without a height a place has that of its own cell", () => {
  const terrain = plane();
  terrain.heightAslM[2 * 40 + 4] = Number.NaN;
  const heightAt = terrainHeights(terrain);
  expect(heightAt(2.19, 52.75)).toBe(230);
  expect(heightAt(2.21, 52.75)).toBeNaN();
});

test("longitudes from 0 to 360, and a model in metres", () => {
  expect(terrainHeights(plane({ west: 200 }))(-159.825, 52.75)).toBeCloseTo(230, 3);
  const metres = plane({
    crs: "+proj=laea +lat_0=52 +lon_0=3 +x_0=0 +y_0=0 +datum=WGS84 +units=m",
    west: -20_000,
    north: 10_000,
    cellWidth: 1000,
    cellHeight: 1000,
  });
  // The middle of the projection lies on the border of columns 19 and 20 and of rows 9 and 10.
  expect(terrainHeights(metres)(3, 52)).toBeCloseTo(10 * 19.5 + 100 * 9.5, 3);
});

test("rays run along geodesics, and points beyond the model are counted", () => {
  const site = { id: "invented", lonDeg: 3, latDeg: 52, antennaHeightM: 50 };
  const rays = terrainAlongRays(
    (lonDeg, latDeg) => (latDeg >= 51.9 ? 1000 * (latDeg - 52) + (lonDeg - 3) : Number.NaN),
    site,
    {
      reachM: 20_000,
      stepM: 500,
      rayCount: 4,
    },
  );
  expect([rays.rayCount, rays.pointCount]).toEqual([4, 40]);
  // A degree of latitude at 52 degrees is 111.27 km on WGS 84 (from memory): 10 km north are 0.08987 degrees.
  expect(Math.abs(rays.heightAslM[19]! - 89.87)).toBeLessThan(0.05);
  // A degree of longitude there is 68.68 km; a geodesic to the east bends towards the equator by metres only.
  expect(Math.abs(rays.heightAslM[40 + 19]! - 0.1456)).toBeLessThan(0.1);
  // South: 0.1 degrees are 11.127 km, 22 points of 500 m; 18 lie beyond.
  expect(rays.uncoveredPoints).toBe(18);
  expect(rays.heightAslM[80 + 21]).not.toBeNaN();
  expect(rays.heightAslM[80 + 22]).toBeNaN();
});
