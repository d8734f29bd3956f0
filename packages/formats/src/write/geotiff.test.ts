import { readFile } from "node:fs/promises";
import { join } from "node:path";
import { InputError } from "@rainreckon/core";
import { fromFile } from "geotiff";
import { expect, test, vi } from "vitest";
import {
  FOREIGN_TOOLS,
  FULL_DEVICE,
  lonLatByProj,
  outputOf,
  PROJECTIONS,
  scratchFolder,
  valuesByGdal,
} from "../../test/foreign-tools.ts";
import { type GeoTiffSpec, writeGeoTiff } from "./geotiff.ts";

const folder = scratchFolder();
const LAEA = PROJECTIONS.laea;

/** Values that tell every cell from every other, with holes; row 0 in the north. */
function spec(nx: number, ny: number, changes: Partial<GeoTiffSpec> = {}): GeoTiffSpec {
  const values = Float32Array.from({ length: nx * ny }, (_, index) =>
    index % 17 === 5 ? Number.NaN : index / 8 - 3,
  );
  const grid = { crs: LAEA, westM: -20_000, northM: 30_000, cellM: 500, nx, ny };
  return { grid, projString: LAEA, values, description: "depth <of> rain & more", unit: "mm", ...changes };
}

async function written(name: string, one: GeoTiffSpec): Promise<string> {
  const path = join(folder, name);
  await writeGeoTiff(path, one);
  return path;
}

// One cell; less than a tile; exactly one; odd sizes over several rows and columns of tiles.
test.each([
  [1, 1],
  [3, 2],
  [256, 256],
  [300, 517],
])("every cell of %d × %d comes back through another reader (geotiff)", async (nx, ny) => {
  const one = spec(nx, ny);
  const tiff = await fromFile(await written(`${nx}x${ny}.tif`, one));
  const image = await tiff.getImage();
  expect([image.getWidth(), image.getHeight()]).toEqual([nx, ny]);
  expect(image.getBoundingBox()).toEqual([-20_000, 30_000 - ny * 500, -20_000 + nx * 500, 30_000]);
  expect(image.getGDALNoData()).toBeNaN();
  const [values] = await image.readRasters();
  expect(values).toEqual(one.values);
  tiff.close();
});

test("a plane larger than a tile carries overviews of means of what was observed", async () => {
  const one = spec(300, 517);
  const tiff = await fromFile(await written("overviews.tif", one));
  expect(await tiff.getImageCount()).toBe(3);
  const sizes = await Promise.all(
    [0, 1, 2].map(async (index) => {
      const image = await tiff.getImage(index);
      return [image.getWidth(), image.getHeight(), image.fileDirectory.getValue("NewSubfileType") ?? 0];
    }),
  );
  expect(sizes).toEqual([
    [300, 517, 0],
    [150, 259, 1],
    [75, 130, 1],
  ]);
  const [half] = await (await tiff.getImage(1)).readRasters();
  const at = (column: number, row: number) => (row * 300 + column) / 8 - 3;
  // Cells (4, 0) and (5, 1) are observed, (5, 0) is not: index 5 of every 17; (4, 1) is index 304 = 15 mod 17.
  expect((half as Float32Array)[2]).toBeCloseTo((at(4, 0) + at(4, 1) + at(5, 1)) / 3, 5);
  // An odd last row has no row below it.
  expect((half as Float32Array)[258 * 150]).toBeCloseTo((at(0, 516) + at(1, 516)) / 2, 3);
  tiff.close();
});

test("a system with a code is its code, and nothing else is said of it", async () => {
  const one = spec(2, 2);
  const path = await written("code.tif", { ...one, grid: { ...one.grid, crs: "EPSG:3035" } });
  const tiff = await fromFile(path);
  const image = await tiff.getImage();
  expect(image.getGeoKeys()).toEqual({
    GTModelTypeGeoKey: 1,
    GTRasterTypeGeoKey: 1,
    ProjectedCSTypeGeoKey: 3035,
    ProjLinearUnitsGeoKey: 9001,
  });
  tiff.close();
});

test("the same values give the same bytes at another time", async () => {
  const first = await readFile(await written("first.tif", spec(20, 10)));
  const clock = vi.spyOn(Date, "now").mockReturnValue(2e12);
  const second = await readFile(await written("second.tif", spec(20, 10)));
  clock.mockRestore();
  expect(second.equals(first)).toBe(true);
});

test("values that do not fill the grid are the caller's mistake", async () => {
  await expect(
    writeGeoTiff(join(folder, "x.tif"), spec(2, 2, { values: new Float32Array(3) })),
  ).rejects.toThrow(RangeError);
});

test.each([
  ["a projection without words in GeoTIFF", "+proj=somerc +lat_0=46 +lon_0=7 +ellps=bessel", /somerc/],
  ["a cone with two parallels and a scale", "+proj=lcc +lat_1=40 +lat_2=50 +k_0=0.9 +ellps=GRS80", /lcc/],
  ["degrees", "+proj=longlat +datum=WGS84", /projected/],
])("%s is wrong usage, said before a file is made", async (name, projString, what) => {
  const one = spec(2, 2);
  const path = join(folder, `${name}.tif`);
  const attempt = writeGeoTiff(path, { ...one, projString, grid: { ...one.grid, crs: projString } });
  await expect(attempt).rejects.toThrow(InputError);
  await expect(attempt).rejects.toThrow(what);
  await expect(readFile(path)).rejects.toThrow("ENOENT");
});

test.skipIf(!FULL_DEVICE)(
  "a full disk is a failure midway (skipped where there is no /dev/full)",
  async () => {
    await expect(writeGeoTiff("/dev/full", spec(300, 300))).rejects.toMatchObject({
      kind: "midway",
      where: "/dev/full",
    });
  },
);

test.skipIf(!FOREIGN_TOOLS)(
  "gdalinfo reads what the file says of itself (RAINRECKON_FOREIGN_TOOLS=1)",
  async () => {
    const info = outputOf("gdalinfo", [await written("info.tif", spec(300, 10))]);
    for (const line of [
      "Size is 300, 10",
      "Origin = (-20000.000000000000000,30000.000000000000000)",
      "Pixel Size = (500.000000000000000,-500.000000000000000)",
      "AREA_OR_POINT=Area",
      "COMPRESSION=DEFLATE",
      "PREDICTOR=3",
      "Overviews: 150x5",
      "Block=256x256 Type=Float32",
      "NoData Value=nan",
      "Unit Type: mm",
      "Description = depth <of> rain & more",
      'METHOD["Lambert Azimuthal Equal Area"',
      'ELLIPSOID["GRS 1980",6378137,298.2572221',
      'PARAMETER["False easting",4000',
    ]) {
      expect(info).toContain(line);
    }
  },
);

test.skipIf(!FOREIGN_TOOLS)("gdalinfo knows a system by its code (RAINRECKON_FOREIGN_TOOLS=1)", async () => {
  const one = spec(2, 2);
  const path = await written("known.tif", { ...one, grid: { ...one.grid, crs: "EPSG:3035" } });
  expect(outputOf("gdalinfo", [path])).toMatch(
    /PROJCRS\["ETRS89-extended \/ LAEA Europe"[\s\S]*ID\["EPSG",3035\]\]/,
  );
});

test.skipIf(!FOREIGN_TOOLS)("GDAL reads every cell of many tiles (RAINRECKON_FOREIGN_TOOLS=1)", async () => {
  const one = spec(270, 260);
  const path = await written("many.tif", one);
  const lines = outputOf("gdal_translate", ["-q", "-of", "XYZ", path, "/vsistdout/"]).trim().split("\n");
  expect(lines).toHaveLength(270 * 260);
  const values = Float32Array.from(lines, (line) => Number(line.split(" ")[2]));
  expect(values).toEqual(one.values);
  expect(lines[0]).toMatch(/^-19750 29750 /);
});

// Cells of 50 m, so that a forgotten shift of datum, scale or offset lands elsewhere.
test.skipIf(!FOREIGN_TOOLS).each(Object.entries(PROJECTIONS))(
  "GDAL finds the one wet cell by longitude and latitude: %s (RAINRECKON_FOREIGN_TOOLS=1)",
  async (name, projString) => {
    const [x0, y0] = ["x_0", "y_0"].map((key) =>
      Number(new RegExp(`${key}=(\\S+)`).exec(projString)?.[1] ?? 0),
    );
    const grid = { crs: projString, westM: x0 + 90_000, northM: y0 - 70_000, cellM: 50, nx: 7, ny: 5 };
    const values = new Float32Array(35);
    values[3 * 7 + 1] = 42.5;
    const path = await written(`${name}.tif`, { grid, projString, values, description: name, unit: "mm" });
    const places = lonLatByProj(projString, [
      [grid.westM + 75, grid.northM - 175],
      [grid.westM + 175, grid.northM - 75],
    ]);
    expect(valuesByGdal(path, places)).toEqual([42.5, 0]);
  },
);
