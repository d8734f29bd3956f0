import { writeFileSync } from "node:fs";
import { join } from "node:path";
import { expect, test } from "vitest";
import { FOREIGN_TOOLS, outputOf, PROJECTIONS, scratchFolder } from "../../test/foreign-tools.ts";
import { writeGeoTiff } from "../write/index.ts";
import { readRasterGrid } from "./raster-grid.ts";

const folder = scratchFolder();
const GRID = { crs: "EPSG:3035", westM: 4_000_012.5, northM: 3_200_025, cellM: 250, nx: 4, ny: 3 };

async function raster(name: string, crs: string): Promise<string> {
  const path = join(folder, name);
  const values = new Float32Array(GRID.nx * GRID.ny);
  const spec = { grid: { ...GRID, crs }, projString: PROJECTIONS.laea, values, description: "x", unit: "m" };
  await writeGeoTiff(path, spec);
  return path;
}

test("the grid of a raster is read to the last digit", async () => {
  expect(await readRasterGrid(await raster("like.tif", "EPSG:3035"))).toEqual(GRID);
});

test("what no grid can be laid upon is the caller's choice to mend", async () => {
  const cases: [string, RegExp][] = [
    [await raster("own.tif", PROJECTIONS.laea), /no EPSG code/],
    [join(folder, "none.tif"), /cannot be opened/],
  ];
  writeFileSync(join(folder, "text.tif"), "no picture");
  cases.push([join(folder, "text.tif"), /./]);
  for (const [path, what] of cases)
    await expect(readRasterGrid(path)).rejects.toMatchObject({
      kind: "usage",
      where: path,
      what: expect.stringMatching(what),
    });
});

test.skipIf(!FOREIGN_TOOLS)(
  "rasters of another program: oblong cells and degrees are refused (RAINRECKON_FOREIGN_TOOLS=1)",
  async () => {
    const like = await raster("source.tif", "EPSG:3035");
    const oblong = join(folder, "oblong.tif");
    outputOf("gdal_translate", ["-q", "-outsize", "200%", "100%", like, oblong]);
    await expect(readRasterGrid(oblong)).rejects.toThrow(/not square: 125 by 250 m/);
    const degrees = join(folder, "degrees.tif");
    outputOf("gdalwarp", ["-q", "-t_srs", "EPSG:4326", like, degrees]);
    await expect(readRasterGrid(degrees)).rejects.toThrow(/in degrees/);
    const utm = join(folder, "utm.tif");
    outputOf("gdalwarp", ["-q", "-t_srs", "EPSG:32631", "-tr", "100", "100", "-tap", like, utm]);
    const grid = await readRasterGrid(utm);
    expect(grid).toMatchObject({ crs: "EPSG:32631", cellM: 100 });
    expect([grid.westM % 100, grid.northM % 100]).toEqual([0, 0]);
  },
);
