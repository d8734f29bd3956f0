import type { Grid } from "@rainreckon/core";
import { expect, test } from "vitest";
import { inventedInput } from "../../test/invented-input.ts";
import { readPalettePng } from "../../test/png-reader.ts";
import type { ReportInput } from "../input.ts";
import { classLayers, drawLayers } from "./layer.ts";
import { svgMap } from "./map.ts";

// One wet cell in the north-east of a field that is wider than high, so that no mirror or swap of axes
// leaves it where it is: row 2 of 20 from the north, column 31 of 40 from the west. Cells of 500 m.
const grid: Grid = { crs: "EPSG:3035", westM: 4_000_000, northM: 3_200_000, cellM: 500, nx: 40, ny: 20 };
const WET = { row: 2, column: 31 };
// By the definition of Grid: x = west + (column + 0.5) cell, y = north - (row + 0.5) cell.
const WET_PLACE = { xM: 4_015_750, yM: 3_198_750 };

function oneWetCell(nx = grid.nx, ny = grid.ny, row = WET.row, column = WET.column): Float32Array {
  const values = new Float32Array(nx * ny);
  values[row * nx + column] = 25;
  values[0] = Number.NaN;
  return values;
}

function place(values: Float32Array, on: Grid): ReportInput {
  const input = inventedInput();
  return {
    ...input,
    grid: on,
    layers: [{ quantity: "depthMm", id: "radar", label: "Radar total", what: "", values }],
    gauges: [{ ...input.gauges[0], ...WET_PLACE }],
    radars: [{ id: "far", xM: on.westM - 1, yM: on.northM }],
    catchments: [],
  };
}

/** Left, top, width and height of the picture in the map's units, and its pixels, as the SVG has them. */
function pictureOf(svg: string) {
  const [, left, top, scale] = /translate\((\S+) (\S+)\) scale\(([\d.]+)\)/.exec(svg)!.map(Number);
  const [, width, height] = /<image class="cells" width="(\d+)" height="(\d+)"/.exec(svg)!.map(Number);
  const base64 = /base64,([^"]+)"/.exec(svg)![1];
  return { left, top, scale, width, height, png: readPalettePng(Buffer.from(base64, "base64")) };
}

function gaugeOf(svg: string): { x: number; y: number } {
  const [, x, y] = /class="gauge used" data-place="g0" transform="translate\((\S+) (\S+)\)"/
    .exec(svg)!
    .map(Number);
  return { x, y };
}

test("the wet cell is the one coloured pixel, and the gauge in it stands in its middle", () => {
  const input = place(oneWetCell(), grid);
  const svg = svgMap(input, drawLayers(classLayers(input.layers, grid.nx, grid.ny), input.radars)).text;
  const { left, top, scale, width, height, png } = pictureOf(svg);
  expect([width, height, png.width, png.height]).toEqual([40, 20, 40, 20]);
  const drawn = [...png.indices.entries()].filter(([, index]) => png.palette[index][3] === 255);
  expect(drawn.map(([pixel]) => pixel)).toEqual([2 * 40 + 31]);
  // The middle of column 31 and row 2; the SVG keeps two decimals.
  const gauge = gaugeOf(svg);
  expect(Math.abs(gauge.x - (left + 31.5 * scale))).toBeLessThanOrEqual(0.005);
  expect(Math.abs(gauge.y - (top + 2.5 * scale))).toBeLessThanOrEqual(0.005);
});

test("the cell that was not observed is hatched, and only it", () => {
  const input = place(oneWetCell(), grid);
  const svg = svgMap(input, drawLayers(classLayers(input.layers, grid.nx, grid.ny), input.radars)).text;
  expect(svg).toContain('<path id="unseen-0" d="M0 0h1v1h-1z" fill="url(#map-hatch)"/>');
});

// A height has no class that is left clear, so a hole painted as a class would show as a low beam.
test.each(["depthMm", "fraction", "heightM"] as const)(
  "a hole in a layer of %s has no colour of its own",
  (quantity) => {
    const values = Float32Array.of(Number.NaN, 0, 1, 900);
    const [drawn] = drawLayers(classLayers([{ quantity, id: "a", label: "A", what: "", values }], 2, 2), []);
    const { indices, palette } = readPalettePng(drawn.png);
    expect([...indices.entries()].filter(([, index]) => index === indices[0]).map(([cell]) => cell)).toEqual([
      0,
    ]);
    expect(palette[indices[0]][3]).toBe(0);
  },
);

test("thinned, the wet cell lies in its block and the gauge still over it", () => {
  // The same place in cells of 25 m: 800 x 400 cells, drawn by blocks of three.
  const fine: Grid = { ...grid, cellM: 25, nx: 800, ny: 400 };
  const column = (WET_PLACE.xM - fine.westM) / 25;
  const row = (fine.northM - WET_PLACE.yM) / 25;
  const input = place(oneWetCell(800, 400, row, column), fine);
  const svg = svgMap(input, drawLayers(classLayers(input.layers, 800, 400), input.radars)).text;
  const { left, top, scale, png } = pictureOf(svg);
  expect([png.width, png.height]).toEqual([267, 134]);
  const drawn = [...png.indices.entries()].filter(([, index]) => png.palette[index][3] === 255);
  expect(drawn.map(([pixel]) => pixel)).toEqual([Math.floor(row / 3) * 267 + Math.floor(column / 3)]);
  const gauge = gaugeOf(svg);
  expect(Math.floor((gauge.x - left) / scale)).toBe(Math.floor(column / 3));
  expect(Math.floor((gauge.y - top) / scale)).toBe(Math.floor(row / 3));
});

test("radars share out the cells: each has its own pattern over its own cells", () => {
  const input = inventedInput();
  const who = Float32Array.from({ length: 800 }, (_, i) => (i % 40 < 10 ? 0 : i % 40 < 30 ? 1 : Number.NaN));
  const layers = drawLayers(
    classLayers([{ quantity: "radarIndex", id: "who", label: "Who", what: "", values: who }], 40, 20),
    input.radars,
  );
  const svg = svgMap({ ...input, grid }, layers).text;
  expect(svg).toContain('<path d="M0 0h10v20h-10z" fill="url(#radar-tile-0)"/>');
  expect(svg).toContain('<path d="M10 0h20v20h-20z" fill="url(#radar-tile-1)"/>');
  expect(svg).toContain('<path id="unseen-0" d="M30 0h10v20h-10z" fill="url(#map-hatch)"/>');
});

test("a layer that names a radar that is not there is refused", () => {
  const who = {
    quantity: "radarIndex",
    id: "who",
    label: "Who",
    what: "",
    values: Float32Array.of(2),
  } as const;
  expect(() => drawLayers(classLayers([who], 1, 1), inventedInput().radars)).toThrow(
    "layer who names radar 2 of 2",
  );
});

test("what lies off the map is not drawn on it", () => {
  const input = place(oneWetCell(), grid);
  const svg = svgMap(
    { ...input, gauges: [{ ...input.gauges[0], xM: 4_020_001 }] },
    drawLayers(classLayers(input.layers, 40, 20), []),
  ).text;
  expect(svg).not.toContain('class="gauge');
  expect(svg).not.toContain('class="radar"');
});
