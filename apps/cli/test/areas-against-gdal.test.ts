import { execFileSync } from "node:child_process";
import { cellFractions } from "@rainreckon/accumulation";
import type { Grid, Ring } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { FOREIGN, scratchFolder, writeIn } from "./total-kit.ts";

// Shares of cells that hand-made and drawn polygons cover, against intersections by GDAL with GEOS (SQLite dialect).
const scratch = scratchFolder("areas");
const grid: Grid = { crs: "plane", westM: 0, northM: 8000, cellM: 1000, nx: 8, ny: 8 };

type Polygon = readonly Ring[];
const ring = (...positions: readonly (readonly [number, number])[]): Ring => [
  ...positions,
  positions[0] as readonly [number, number],
];
const box = (x: number, y: number, w: number, h: number): Ring =>
  ring([x, y], [x + w, y], [x + w, y + h], [x, y + h]);

/** A star of drawn radii about a point: concave, and never crossing itself. Numbers of Park and Miller (1988). */
function star(seed: number): Ring {
  let state = seed;
  const draw = () => {
    state = (state * 16_807) % 2_147_483_647;
    return state / 2_147_483_647;
  };
  for (let turn = 0; turn < 5; turn++) draw();
  const [x, y] = [2500 + 3000 * draw(), 2500 + 3000 * draw()];
  return ring(
    ...Array.from({ length: 24 }, (_, k): [number, number] => {
      const radius = 300 + 2900 * draw() ** 2;
      return [x + radius * Math.cos((k * Math.PI) / 12), y + radius * Math.sin((k * Math.PI) / 12)];
    }),
  );
}

const CASES: readonly (readonly [string, readonly Polygon[]])[] = [
  ["a box on the lines of the grid", [[box(1000, 1000, 3000, 2000)]]],
  [
    "a box with two holes, one across a line",
    [[box(500, 500, 6000, 6000), box(1200, 1200, 400, 700), box(2700, 3100, 2000, 1300)]],
  ],
  ["a sliver within one cell", [[ring([3100, 3100], [3900, 3100.5], [3900, 3100.8])]]],
  ["a sliver of a metre across the whole grid", [[ring([10, 4200], [7990, 4700], [7990, 4701], [10, 4201])]]],
  [
    "several polygons, an island in the hole of another",
    [
      [box(500, 500, 5000, 5000), box(1500, 1500, 3000, 3000)],
      [ring([2500, 2500], [3500, 2600], [2900, 3600])],
      [box(6200, 6200, 700, 1500)],
    ],
  ],
  [
    "a comb of thin teeth",
    [
      [
        ring(
          [500, 500],
          [7500, 500],
          [7500, 900],
          [6300, 900],
          [6250, 7500],
          [6200, 900],
          [2300, 900],
          [2250, 7100],
          [2200, 900],
          [500, 900],
        ),
      ],
    ],
  ],
  [
    "one that reaches beyond the grid",
    [[ring([-3000, 2000], [4000, -2500], [11_000, 5000], [3000, 12_000])]],
  ],
  ...[1, 2, 3, 4, 5, 6].map((seed) => [`star ${seed}`, [[star(seed * 7919)]]] as const),
];

/** Area of each cell that GDAL finds covered, by flat index, m². */
function byGdal(polygons: readonly Polygon[]): Map<number, number> {
  const rings = (polygon: Polygon) =>
    `(${polygon.map((one) => `(${one.map(([x, y]) => `${x} ${y}`).join(",")})`).join(",")})`;
  const wkt = `MULTIPOLYGON(${polygons.map(rings).join(",")})`;
  const cells = Array.from({ length: 64 }, (_, cell) => {
    const [west, south] = [1000 * (cell % 8), 7000 - 1000 * Math.floor(cell / 8)];
    return `${cell},${west},${south}`;
  });
  const file = writeIn(scratch, "cells.csv", `cell,west,south\n${cells.join("\n")}\n`);
  writeIn(scratch, "cells.csvt", '"Integer","Real","Real"\n');
  const sql = `SELECT cell, ST_Area(ST_Intersection(ST_GeomFromText('${wkt}'), BuildMbr(west, south, west + 1000, south + 1000))) AS m2 FROM cells`;
  const text = execFileSync(
    "ogr2ogr",
    ["-f", "CSV", "/vsistdout/", file, "-dialect", "SQLite", "-sql", sql],
    {
      encoding: "utf8",
    },
  );
  const rows = text
    .trim()
    .split("\n")
    .slice(1)
    .map((line) => line.replaceAll('"', "").split(","));
  return new Map(rows.map(([cell, m2]) => [Number(cell), Number(m2 || 0)]));
}

describe.skipIf(!FOREIGN)("areas against GDAL", () => {
  test.each(CASES)("%s", (_name, polygons) => {
    const wanted = byGdal(polygons);
    expect(wanted.size).toBe(64);
    const { cells, fraction, insideGrid, areaM2 } = cellFractions(grid, polygons);
    const found = new Map([...cells].map((cell, k) => [cell, (fraction[k] as number) * 1e6]));
    // To a square centimetre of a square kilometre.
    for (const [cell, m2] of wanted)
      expect(Math.abs((found.get(cell) ?? 0) - m2), `cell ${cell}`).toBeLessThan(1e-4);
    const inside = [...wanted.values()].reduce((sum, m2) => sum + m2, 0);
    expect(Math.abs(insideGrid * areaM2 - inside)).toBeLessThan(1e-3);
  });
});
