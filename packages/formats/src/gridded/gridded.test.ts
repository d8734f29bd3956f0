import { copyFileSync, readFileSync, writeFileSync } from "node:fs";
import path from "node:path";
import { fileURLToPath } from "node:url";
import { InputError } from "@rainreckon/core";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { FOREIGN_TOOLS, outputOf } from "../../test/foreign-tools.ts";
import { mutant, random } from "../../test/mutations.ts";
import {
  GATES,
  MOMENT,
  RAYS,
  ROOT,
  removeTemporary,
  temporaryPath,
  writeOdim,
} from "../../test/odim-fixture.ts";
import { formatsReady, openScan } from "../radar/index.ts";
import { fileNameTime } from "./file-name-time.ts";
import { type GriddedFile, type GriddedOptions, type GriddedScan, openGridded } from "./index.ts";
import { measureOf } from "./quantities.ts";

/**
 * grid-*.nc are written by ncgen (Unidata) from the .cdl files beside them, grid-rate.tif by gdal_translate (GDAL
 * 3.6.2) from grid-rate.asc; what is expected is read off those. RAINRECKON_FOREIGN_TOOLS=1 has them written again.
 */
const fixture = (name: string) => fileURLToPath(new URL(`../../test/fixtures/${name}`, import.meta.url));
const noon = Date.parse("2031-05-03T12:00:00Z");
const MINUTE = 60_000;
const dry = Number.NEGATIVE_INFINITY;

beforeAll(formatsReady);
afterAll(removeTemporary);

async function opened(file: string, options: GriddedOptions = {}): Promise<GriddedFile> {
  const grid = await openGridded(file, options);
  if (grid === undefined) throw new Error("no gridded file");
  return grid;
}

async function layers(file: string, options: GriddedOptions = {}): Promise<GriddedScan[]> {
  const grid = await opened(file, options);
  const scans = await Promise.all(grid.headers.map((_, index) => grid.readLayer(index)));
  grid.close();
  return scans;
}

async function fault(work: () => Promise<unknown>): Promise<InputError> {
  try {
    await work();
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error("nothing was thrown");
}

const rounded = (values: Float32Array) => [...values].map((value) => Math.round(value * 1000) / 1000);

async function checkRate(file: string): Promise<void> {
  const [first, second, ...others] = await layers(file);
  expect(others).toEqual([]);
  expect(first).toMatchObject({
    origin: { path: file, dataset: "rate" },
    quantity: "rainRateMmPerHour",
    nx: 3,
    ny: 2,
    startEpochMs: noon,
    endEpochMs: noon + 5 * MINUTE,
    place: { kind: "affine", west: 0, north: 12_000, cellWidth: 1000, cellHeight: 1000 },
    remarks: [],
  });
  expect(first?.place).toHaveProperty(
    "crs",
    "+proj=laea +lat_0=52 +lon_0=10 +x_0=4321000 +y_0=3210000 +a=6378137 +rf=298.257222101 +units=m +no_defs",
  );
  // The file's second row is the northern one.
  expect(rounded(first!.values)).toEqual([4, Number.NaN, 0, 0.1, 0.2, 0.3]);
  expect(second).toMatchObject({ startEpochMs: noon + 5 * MINUTE, endEpochMs: noon + 10 * MINUTE });
  expect(rounded(second!.values)).toEqual([1, 1.1, 1.2, 0.7, 0.8, 0.9]);
}

async function checkDepth(file: string): Promise<void> {
  const [depth, echo] = await layers(file);
  expect(depth).toMatchObject({
    quantity: "depthMm",
    startEpochMs: noon,
    endEpochMs: noon + 60 * MINUTE,
    place: { kind: "positions" },
  });
  // -99 is the fill value; -3 mm cannot be.
  expect([...depth!.values]).toEqual([1.5, 0, Number.NaN, Number.NaN]);
  expect(depth!.remarks).toEqual(["1 cells hold a negative or endless value and count as not observed."]);
  const place = depth!.place as Extract<
    typeof depth extends undefined ? never : GriddedScan["place"],
    { kind: "positions" }
  >;
  expect(rounded(Float32Array.from(place.latDeg))).toEqual([52, 52.1, 51, 51.1]);
  expect(echo?.quantity).toBe("reflectivityDbz");
  expect([...echo!.values]).toEqual([20, -10, Number.NaN, dry]);
}

async function checkTiff(file: string): Promise<void> {
  const [layer] = await layers(file);
  expect(layer).toMatchObject({
    quantity: "rainRateMmPerHour",
    nx: 3,
    ny: 2,
    startEpochMs: noon + 5 * MINUTE,
    endEpochMs: noon + 5 * MINUTE,
    place: {
      kind: "affine",
      crs: "EPSG:3035",
      west: 4_321_000,
      north: 3_212_000,
      cellWidth: 1000,
      cellHeight: 1000,
    },
    remarks: ["The time is taken from the file's DateTime tag, as UTC."],
  });
  expect([...layer!.values]).toEqual([0.5, 1.5, Number.NaN, 0, 20, 2.5]);
}

test.each([
  ["grid-rate.nc", checkRate],
  ["grid-rate-hdf5.nc", checkRate],
  ["grid-depth.nc", checkDepth],
  ["grid-rate.tif", checkTiff],
] as const)("%s", async (name, check) => {
  await check(fixture(name));
});

describe.skipIf(!FOREIGN_TOOLS)("written anew (skipped unless RAINRECKON_FOREIGN_TOOLS=1)", () => {
  test.each([
    ["grid-rate.cdl", "classic", checkRate],
    ["grid-rate.cdl", "nc7", checkRate],
    ["grid-depth.cdl", "nc4", checkDepth],
  ] as const)("%s as %s by ncgen", async (cdl, kind, check) => {
    const file = temporaryPath("written.nc");
    outputOf("ncgen", ["-k", kind, "-o", file, fixture(cdl)]);
    await check(file);
  });

  test.each(["NONE", "LZW", "DEFLATE", "PACKBITS"])(
    "GeoTIFF packed by %s, by gdal_translate",
    async (packing) => {
      const file = temporaryPath("written.tif");
      outputOf("gdal_translate", ["-q", "-co", `COMPRESS=${packing}`, fixture("grid-rate.tif"), file]);
      await checkTiff(file);
    },
  );

  test("GeoTIFF in tiles and in whole numbers with scale", async () => {
    const file = temporaryPath("tiled.tif");
    const tiles = ["-co", "TILED=YES", "-co", "BLOCKXSIZE=16", "-co", "BLOCKYSIZE=16"];
    const scaled = ["-ot", "Int16", "-a_scale", "0.1", "-a_offset", "0", "-scale", "0", "20", "0", "200"];
    outputOf("gdal_translate", ["-q", ...tiles, ...scaled, fixture("grid-rate.tif"), file]);
    // Scaling makes the tool forget the unit, so it is told.
    expect(await openGridded(file)).toBeUndefined();
    const [layer] = await layers(file, { quantity: "rainRateMmPerHour" });
    expect(rounded(layer!.values)).toEqual([0.5, 1.5, Number.NaN, 0, 20, 2.5]);
  });
});

const where = {
  projdef: "+proj=stere +lat_0=90 +lon_0=10 +lat_ts=60 +ellps=WGS84",
  xsize: GATES,
  ysize: RAYS,
  xscale: 1000,
  yscale: 2000,
  UL_lon: 5,
  UL_lat: 55,
};
const what = {
  product: "COMP",
  startdate: "20310503",
  starttime: "115500",
  enddate: "20310503",
  endtime: "120000",
};
const composite = (quantity: string, over: object = {}) =>
  writeOdim({
    ...ROOT,
    what: { ...ROOT.what, object: "COMP" },
    where: { ...where, ...over },
    datasets: [{ what, data: [{ ...MOMENT, what: { ...MOMENT.what, quantity, offset: 0 } }] }],
  });

describe("ODIM_H5 composites", () => {
  test.each([
    ["RATE", "rainRateMmPerHour", 0],
    ["ACRR", "depthMm", 0],
    ["DBZH", "reflectivityDbz", dry],
  ] as const)("%s", async (name, quantity, undetected) => {
    const [layer] = await layers(composite(name));
    expect(layer).toMatchObject({
      origin: { dataset: "dataset1/data1" },
      quantity,
      nx: GATES,
      ny: RAYS,
      place: { kind: "corner", crs: where.projdef, lonDeg: 5, latDeg: 55, cellWidth: 1000, cellHeight: 2000 },
      startEpochMs: noon - 5 * MINUTE,
      endEpochMs: noon,
    });
    // Codes 0, 1, 2, … at gain 0.5 and offset 0; 0 is undetect.
    expect([...layer!.values.slice(0, 3)]).toEqual([undetected, 0.5, 1]);
  });

  test("is told from a polar scan, either way round", async () => {
    expect(() => openScan(composite("RATE"))).toThrow(/Cartesian composite/);
    expect(await openGridded(writeOdim({ ...ROOT, datasets: [] }))).toBeUndefined();
  });

  test.each([
    [{ projdef: "" }, "the grid has no usable projection (projdef)"],
    [{ xscale: 0 }, "the grid has no usable cell size (xscale, yscale)"],
    [{ UL_lat: 95 }, "the grid has no usable corner (UL_lon, UL_lat)"],
    [{ xsize: 4 }, "the array is 8 by 5, but the grid has 8 rows of 4"],
    [{ xsize: 2e9 }, "the grid claims 2000000000 by 8 cells"],
  ])("fault %o", async (over, message) => {
    const error = await fault(() => openGridded(composite("RATE", over)));
    expect(error.what).toBe(message);
    expect(error.where).toMatch(/, dataset1\/data1$/);
  });

  test("a quantity that no total starts from", async () => {
    expect((await fault(() => openGridded(composite("VRADH")))).what).toBe("it holds VRADH");
  });
});

describe("what a file does not say", () => {
  test("a file that is no rain on a map is none of ours", async () => {
    expect(await openGridded(fixture("cfradial1-classic.nc"))).toBeUndefined();
    expect(await openGridded(fixture("cfradial2.nc"))).toBeUndefined();
    expect(await openGridded(fixture("grid-rate.cdl"))).toBeUndefined();
  });

  test("the name's span makes a depth of a GeoTIFF, and the plan's time beats all", async () => {
    const named = path.join(path.dirname(temporaryPath("x")), "sum_20310503T1200_20310503T1300.tif");
    copyFileSync(fixture("grid-rate.tif"), named);
    const [depth] = await layers(named, { quantity: "depthMm" });
    expect(depth).toMatchObject({ quantity: "depthMm", startEpochMs: noon, endEpochMs: noon + 60 * MINUTE });
    const time = { startEpochMs: 0, endEpochMs: 1000 };
    const [told] = await layers(named, { quantity: "depthMm", time });
    expect(told).toMatchObject({ ...time, remarks: [] });
    expect((await fault(() => openGridded(fixture("grid-rate.tif"), { quantity: "depthMm" }))).what).toBe(
      "a depth with an instant, but no start and end",
    );
  });

  test.each([
    ["rate_20310503_1205.tif", "2031-05-03T12:05:00Z", "2031-05-03T12:05:00Z"],
    ["203105031205.nc", "2031-05-03T12:05:00Z", "2031-05-03T12:05:00Z"],
    ["a-2031-05-03T12-05-30-b.nc", "2031-05-03T12:05:30Z", "2031-05-03T12:05:30Z"],
    ["20310503T1200-20310503T1300.tif", "2031-05-03T12:00:00Z", "2031-05-03T13:00:00Z"],
  ])("%s", (name, start, end) => {
    expect(fileNameTime(name)).toEqual({ startEpochMs: Date.parse(start), endEpochMs: Date.parse(end) });
  });

  test.each([
    "rate.tif",
    "20310503.tif",
    "20311303_1200.tif",
    "20310503_2500.tif",
    "20310503T1300-20310503T1200.tif",
    "99203105031205.tif",
  ])("%s has no time", (name) => expect(fileNameTime(name)).toBeUndefined());

  test.each([
    ["kg m-2 s-1", ["precipitation_flux"], "rainRateMmPerHour", 3600],
    ["mm h^-1", ["x"], "rainRateMmPerHour", 1],
    ["m s-1", ["lwe_precipitation_rate"], "rainRateMmPerHour", 3_600_000],
    ["m", ["lwe_thickness_of_precipitation_amount"], "depthMm", 1000],
    ["dBZ", ["x"], "reflectivityDbz", 1],
  ] as const)("%s of %s", (units, names, quantity, factor) => {
    expect(measureOf(units, names)).toEqual({ quantity, factor });
  });

  test("a wind speed, a height and a unit from Object.prototype are no rain", () => {
    expect(measureOf("m s-1", ["wind_speed"])).toBeUndefined();
    expect(measureOf("m", ["height"])).toBeUndefined();
    expect(measureOf("constructor", ["rain"])).toBeUndefined();
  });
});

describe("damage", () => {
  const samples: Readonly<Record<string, () => readonly Buffer[]>> = {
    "CF NetCDF-3": () => [readFileSync(fixture("grid-rate.nc")), readFileSync(fixture("grid-depth.nc"))],
    "CF NetCDF-4": () => [readFileSync(fixture("grid-rate-hdf5.nc"))],
    GeoTIFF: () => [readFileSync(fixture("grid-rate.tif"))],
    "ODIM_H5 composite": () => [readFileSync(composite("RATE"))],
  };

  async function readAll(file: string): Promise<"read" | "refused"> {
    try {
      const grid = await openGridded(file);
      if (grid === undefined) return "refused";
      try {
        for (const [index, header] of grid.headers.entries()) {
          const { values } = await grid.readLayer(index);
          expect(values).toHaveLength(header.nx * header.ny);
          const isRate = header.quantity !== "reflectivityDbz";
          expect(
            values.every((value) => Number.isNaN(value) || !isRate || (value >= 0 && Number.isFinite(value))),
          ).toBe(true);
          expect(header.endEpochMs).toBeGreaterThanOrEqual(header.startEpochMs);
        }
      } finally {
        grid.close();
      }
      return "read";
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      expect(error.where).toContain(file);
      expect(error.fix).not.toBe("");
      return "refused";
    }
  }

  test.each(Object.entries(samples))(
    "%s: changed files never crash, hang or contradict themselves",
    async (_, make) => {
      const whole = make();
      const next = random(20_310_503);
      const file = temporaryPath("changed");
      const outcomes = { read: 0, refused: 0 };
      let longestMs = 0;
      for (let round = 0; round < 2000; round++) {
        // Two in three leave the head alone, so that they get past the magic check.
        writeFileSync(file, mutant(whole[round % whole.length]!, next, round % 3 === 0 ? 0 : 8));
        const before = performance.now();
        outcomes[await readAll(file)] += 1;
        longestMs = Math.max(longestMs, performance.now() - before);
      }
      expect(longestMs).toBeLessThan(5000);
      expect(outcomes.read).toBeGreaterThan(0);
      expect(outcomes.refused).toBeGreaterThan(0);
    },
  );

  test("a picture that claims more cells than are read is refused before room is made", async () => {
    const bytes = readFileSync(fixture("grid-rate.tif"));
    const directory = bytes.readUInt32LE(4);
    expect(bytes.readUInt16LE(directory + 2)).toBe(256);
    bytes.writeUInt16LE(4, directory + 4);
    bytes.writeUInt32LE(4_000_000_000, directory + 10);
    const file = temporaryPath("huge.tif");
    writeFileSync(file, bytes);
    expect((await fault(() => openGridded(file))).what).toContain("claims 4000000000 by 2 cells");
  });
});
