import type { Grid } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { gridLookup, type SourceCells } from "./grid-lookup.ts";
import { projection } from "./projection.ts";
import { type CellLookup, RateLayerBuilder } from "./rate-layer.ts";

const LAEA = "+proj=laea +lat_0=51 +lon_0=9 +ellps=GRS80 +units=m +no_defs";
const grid: Grid = { crs: LAEA, westM: -10_000, northM: 10_000, cellM: 1000, nx: 20, ny: 20 };
const map = projection(LAEA);

function even(change: Partial<SourceCells & { kind: "even" }> = {}): SourceCells & { kind: "even" } {
  const utm = projection("EPSG:25832");
  return {
    kind: "even",
    nx: 40,
    ny: 40,
    map: utm,
    west: 480_000,
    north: 5_670_000,
    cellWidth: 1000,
    cellHeight: 1000,
    ...change,
  };
}

/** The layer that a lookup makes of a source's values. */
function layer(lookup: CellLookup, values: Float32Array): Float32Array {
  const builder = new RateLayerBuilder(lookup.position.length, new Int32Array(), 0);
  builder.add(
    lookup,
    { codes: undefined, rateMmPerHour: values, capped: new Uint8Array(values.length) },
    [],
    0,
  );
  return builder.finish().rateMmPerHour;
}

/** The even source as positions of its cells. */
function asPositions(source: SourceCells & { kind: "even" }): SourceCells {
  const lonDeg = new Float64Array(source.nx * source.ny);
  const latDeg = new Float64Array(lonDeg.length);
  for (let k = 0; k < lonDeg.length; k++) {
    const x = source.west + ((k % source.nx) + 0.5) * source.cellWidth;
    const y = source.north - (Math.floor(k / source.nx) + 0.5) * source.cellHeight;
    [lonDeg[k], latDeg[k]] = source.map.inverse(x, y);
  }
  return { kind: "positions", nx: source.nx, ny: source.ny, lonDeg, latDeg };
}

// cs2cs (PROJ 9.1.1) from EPSG:25832 to the plane above: 500500 5650500 → 500.200 675.382;
// 505500 5645500 → 5502.196 -4326.627; 495500 5655500 → -4501.805 5677.374. Columns count from -10 km eastward,
// rows from 10 km southward.
const PLACES = [
  { sourceColumn: 20, sourceRow: 19, column: 10, row: 9 },
  { sourceColumn: 25, sourceRow: 24, column: 15, row: 14 },
  { sourceColumn: 15, sourceRow: 14, column: 5, row: 4 },
];

describe.each([
  ["even cells", even()],
  ["a position for each cell", asPositions(even())],
])("%s in another projection", (_, source) => {
  const lookup = gridLookup(grid, map, source);

  test("each wet cell arrives where another program puts its centre", () => {
    const values = new Float32Array(source.nx * source.ny);
    for (const [k, { sourceColumn, sourceRow }] of PLACES.entries())
      values[sourceRow * source.nx + sourceColumn] = k + 1;
    const rates = layer(lookup, values);
    const wettest = PLACES.map(({ column, row }) => rates[row * grid.nx + column]);
    // A neighbour's dry centre may lie in the same cell: at least a half or a third arrives, in order.
    for (const [k, rate] of wettest.entries()) expect(rate).toBeGreaterThanOrEqual((k + 1) / 3);
    const sum = rates.reduce((total, rate) => total + rate, 0);
    expect(sum).toBeLessThan(1.6 * (1 + 2 + 3));
  });

  test("even rain stays even everywhere, and weight is 1, height unknown", () => {
    const rates = layer(lookup, new Float32Array(source.nx * source.ny).fill(3.25));
    expect(new Set(rates)).toEqual(new Set([3.25]));
    expect(new Set(lookup.weight)).toEqual(new Set([1]));
    expect(lookup.beamHeightAslM.every(Number.isNaN)).toBe(true);
  });

  test("what was not observed stays out of means and stays not observed", () => {
    const values = new Float32Array(source.nx * source.ny).fill(2);
    // The western half of the source: its border runs along 500 km, which is x = 0 of the plane.
    for (let k = 0; k < values.length; k++) if (k % source.nx < 20) values[k] = Number.NaN;
    const rates = layer(lookup, values);
    expect(rates.filter((rate) => rate > 0).every((rate) => rate === 2)).toBe(true);
    for (let row = 0; row < 20; row++) {
      expect(rates[row * 20 + 5]).toBeNaN();
      expect(rates[row * 20 + 14]).toBe(2);
    }
  });
});

describe("cells of other sizes", () => {
  const own = { map, west: -10_000, north: 10_000 };

  test("finer ones are averaged, the unobserved left out", () => {
    const source = even({ ...own, nx: 40, ny: 40, cellWidth: 500, cellHeight: 500 });
    const values = new Float32Array(1600);
    values.set([1, 2], 0);
    values.set([6, Number.NaN], 40);
    expect(layer(gridLookup(grid, map, source), values)[0]).toBe(3);
  });

  test.each([
    ["even", (source: SourceCells & { kind: "even" }) => source],
    ["positions", asPositions],
  ])("coarser ones speak for every cell whose centre they hold: %s", (_, form) => {
    const source = form(even({ ...own, nx: 5, ny: 5, cellWidth: 4000, cellHeight: 4000 }));
    const rates = layer(
      gridLookup(grid, map, source),
      Float32Array.from({ length: 25 }, (_, k) => k),
    );
    expect(rates).toEqual(
      Float32Array.from({ length: 400 }, (_, k) => 5 * Math.floor(k / 80) + Math.floor((k % 20) / 4)),
    );
  });

  test("beyond the source nothing is observed", () => {
    const source = even({ ...own, nx: 5, ny: 3, cellWidth: 1000, cellHeight: 1000 });
    const rates = layer(gridLookup(grid, map, source), new Float32Array(15).fill(1));
    expect(rates.reduce((count, rate) => count + (rate === 1 ? 1 : 0), 0)).toBe(15);
    expect([rates[4], rates[5], rates[40], rates[60]]).toEqual([1, Number.NaN, 1, Number.NaN]);
  });

  test("longitudes from 0 to 360 are those from -180 to 180", () => {
    const degrees = projection("EPSG:4326");
    const around = { map: degrees, north: 90, cellWidth: 1, cellHeight: 1, nx: 360, ny: 180 };
    const values = Float32Array.from({ length: 360 * 180 }, (_, k) => k % 360);
    const west: Grid = { ...grid, crs: "+proj=laea +lat_0=51 +lon_0=-9 +ellps=GRS80 +units=m +no_defs" };
    const rates = layer(gridLookup(west, projection(west.crs), even({ ...around, west: 0 })), values);
    // 9° west is the border of columns 350 and 351 of a source that starts at 0°.
    expect([rates[200], rates[219]]).toEqual([350, 351]);
  });
});
