import { readFileSync } from "node:fs";
import { basename } from "node:path";
import { fileURLToPath } from "node:url";
import type { Catchment, Notice } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { FOREIGN_TOOLS, outputOf } from "../../test/foreign-tools.ts";
import { scratchFolder } from "../../test/scratch.ts";
import { type CatchmentFields, readCatchments } from "./catchments.ts";
import type { ShapefileParts } from "./shapefile.ts";
import { sniffMap } from "./sniff-map.ts";

/** Maps that GDAL made from one hand-written GeoJSON file (see the README beside them). */
const folder = scratchFolder();
const fixture = (name: string) => fileURLToPath(new URL(`../../test/fixtures/maps/${name}`, import.meta.url));
const parts = (stem: string, more: Partial<ShapefileParts> = {}): ShapefileParts => ({
  dbf: fixture(`${stem}.dbf`),
  prj: fixture(`${stem}.prj`),
  cpg: fixture(`${stem}.cpg`),
  ...more,
});

async function read(path: string, fields: Partial<CatchmentFields> = {}) {
  const notices: Notice[] = [];
  const catchments = await readCatchments(path, { id: "code", name: "name", ...fields }, (n) =>
    notices.push(n),
  );
  return { catchments, told: notices.map(({ what, where }) => `${basename(where)}: ${what}`) };
}
const shp = (stem: string, fields: Partial<CatchmentFields> = {}) =>
  read(fixture(`${stem}.shp`), { parts: parts(stem), ...fields });

/** Area by the surveyor's formula, holes taken off whichever way they run; and the number of rings. */
function areas(catchments: readonly Catchment[]): [string, string, number, number][] {
  return catchments.map(({ id, name, polygons }) => {
    let area = 0;
    for (const [outer, ...holes] of polygons)
      area += ringArea(outer!) - holes.map(ringArea).reduce((a, b) => a + b, 0);
    return [id, name, polygons.flat().length, area];
  });
}
function ringArea(ring: readonly (readonly [number, number])[]): number {
  let twice = 0;
  for (let k = 0; k + 1 < ring.length; k++)
    twice += ring[k][0] * ring[k + 1][1] - ring[k + 1][0] * ring[k][1];
  return Math.abs(twice) / 2;
}
const NEAR = (value: number) => expect.closeTo(value, 9);
/** By hand from moor.geojson, square degrees. */
const BY_HAND = [
  ["007", "Upper moor", 2, NEAR(0.4 * 0.3 - 0.01)],
  ["012", "Börde am Süßbach", 2, NEAR(0.01 + 0.0075)],
  ["NO", "NO", 1, NEAR((0.3 * 0.2) / 2)],
];

describe("Shapefile", () => {
  test.each([
    ["moor-latin1", "Latin-1 attributes"],
    ["moor-z", "polygons with heights"],
  ])("%s: %s", async (stem) => {
    const { catchments, told } = await shp(stem);
    expect(areas(catchments)).toEqual(BY_HAND);
    expect(told).toEqual([]);
    expect(catchments[0].crs).toMatch(/^GEOGCS\["GCS_WGS_1984"/);
  });

  test("positions in metres are what ogrinfo prints", async () => {
    const { catchments } = await shp("moor-utf8");
    // ogrinfo -al moor-utf8.shp (GDAL 3.6.2).
    const [[x, y]] = [catchments[0].polygons[0][0][1]];
    expect([x, y]).toEqual([expect.closeTo(506956.453309935, 8), expect.closeTo(5694312.67330812, 7)]);
    expect(catchments.map(({ name }) => name)).toEqual(["Upper moor", "Börde am Süßbach", "NO"]);
    expect(catchments[0].crs).toMatch(/^PROJCS\["ETRS_1989_UTM_Zone_32N"/);
  });

  test("an id of more digits than a double holds keeps them all", async () => {
    const { catchments } = await shp("moor-utf8", { id: "big_no" });
    expect(catchments.map(({ id }) => id)).toEqual(["9007199254740993", "12", "13"]);
  });

  test("without a .prj the plan must say what the coordinates are", async () => {
    const lonely = parts("moor-utf8", { prj: undefined });
    await expect(shp("moor-utf8", { parts: lonely })).rejects.toMatchObject({
      what: "nothing says what system the coordinates are in",
      fix: "put its .prj beside it, or write catchments.crs in the plan",
    });
    const { catchments } = await shp("moor-utf8", { parts: lonely, crs: "EPSG:25832" });
    expect(catchments[0].crs).toBe("EPSG:25832");
    expect(await sniffMap(fixture("moor-utf8.shp"), { parts: lonely })).toMatchObject({ crsKnown: false });
  });

  test("without a .dbf there are no ids", async () => {
    await expect(
      read(fixture("moor-utf8.shp"), { parts: { prj: fixture("moor-utf8.prj") } }),
    ).rejects.toMatchObject({
      what: "no catchment is left",
    });
  });

  test("a look at it", async () => {
    expect(await sniffMap(fixture("moor-utf8.shp"), { parts: parts("moor-utf8") })).toMatchObject({
      format: "Shapefile",
      featureCount: 3,
      polygonCount: 3,
      crsKnown: true,
      idFields: ["code", "big_no"],
      nameFields: ["name"],
    });
  });

  test("points are no catchments", async () => {
    await expect(read(fixture("points.shp"))).rejects.toMatchObject({ what: "it holds points, no polygons" });
  });

  test("a row of attributes that is marked as deleted takes its shape along", async () => {
    const dbf = readFileSync(fixture("moor-latin1.dbf"));
    dbf[dbf.readUInt16LE(8)] = 0x2a;
    const { catchments, told } = await shp("moor-latin1", {
      parts: parts("moor-latin1", { dbf: folder.write("deleted.dbf", dbf) }),
    });
    expect(catchments.map(({ id }) => id)).toEqual(["012", "NO"]);
    expect(told).toEqual([
      "moor-latin1.shp, feature 1: its row of attributes is marked as deleted: left out",
    ]);
  });

  test("shapes and attributes of different makings", async () => {
    const dbf = readFileSync(fixture("moor-latin1.dbf"));
    const rows = dbf.readUInt32LE(4);
    const shorter = dbf.subarray(0, dbf.readUInt16LE(8) + (rows - 1) * dbf.readUInt16LE(10));
    shorter.writeUInt32LE(rows - 1, 4);
    const path = folder.write("shorter.dbf", shorter);
    await expect(shp("moor-latin1", { parts: parts("moor-latin1", { dbf: path }) })).rejects.toMatchObject({
      what: "it has 3 shapes, but 2 rows of attributes",
    });
  });

  test("an encoding that nobody knows, and a .prj that is none", async () => {
    const cpg = folder.write("odd.cpg", "KLINGON");
    await expect(shp("moor-utf8", { parts: parts("moor-utf8", { cpg }) })).rejects.toMatchObject({
      what: 'the encoding "KLINGON" of its .cpg is not known',
    });
    const prj = folder.write("odd.prj", "somewhere in the hills");
    await expect(shp("moor-utf8", { parts: parts("moor-utf8", { prj }) })).rejects.toMatchObject({
      what: 'the text "somewhere in the hills" is no coordinate system',
    });
  });

  test("cut short at every byte it is refused by name", async () => {
    const bytes = readFileSync(fixture("moor-utf8.shp"));
    for (let length = 0; length < bytes.length; length++) {
      const path = folder.write("cut.shp", bytes.subarray(0, length));
      await expect(read(path, { parts: parts("moor-utf8") })).rejects.toMatchObject({
        name: "InputError",
        where: expect.stringContaining("cut.shp"),
      });
    }
  });
});

describe("GeoPackage", () => {
  test("of several layers the plan names one", async () => {
    await expect(read(fixture("moor.gpkg"))).rejects.toMatchObject({
      what: "it holds several layers of polygons",
      fix: 'write layer: one of "degrees", "upland"',
    });
    const { catchments, told } = await read(fixture("moor.gpkg"), { layer: "degrees" });
    expect(areas(catchments)).toEqual(BY_HAND);
    expect(told).toEqual([]);
    expect(catchments[0].crs).toBeUndefined();
    await expect(read(fixture("moor.gpkg"), { layer: "places" })).rejects.toMatchObject({
      what: 'it has no layer "places"',
    });
  });

  test("its system by code, its whole numbers with all digits", async () => {
    const { catchments } = await read(fixture("moor.gpkg"), { layer: "upland", id: "big_no" });
    expect(catchments[0]).toMatchObject({ id: "9007199254740993", crs: "EPSG:25832" });
    const [x, y] = catchments[0].polygons[0][0][3];
    // ogrinfo -al moor-utf8.shp (GDAL 3.6.2); rings run the other way in this format.
    expect([x, y]).toEqual([expect.closeTo(506956.453309935, 8), expect.closeTo(5694312.67330812, 7)]);
  });

  test("a look at it names its layers", async () => {
    expect(await sniffMap(fixture("moor.gpkg"))).toMatchObject({
      format: "GeoPackage",
      layer: "degrees",
      layers: ["degrees", "upland"],
      polygonCount: 3,
      idFields: ["code", "big_no", "fid"],
      nameFields: ["name"],
    });
  });

  test("a file whose newest changes may lie beside it", async () => {
    const bytes = readFileSync(fixture("moor.gpkg"));
    bytes[18] = 2;
    bytes[19] = 2;
    await expect(read(folder.write("open.gpkg", bytes))).rejects.toMatchObject({
      what: expect.stringMatching(/write-ahead log/),
    });
  });
});

describe.skipIf(!FOREIGN_TOOLS)("as GDAL reads and writes (RAINRECKON_FOREIGN_TOOLS)", () => {
  const convert = (name: string, ...args: string[]) => {
    const path = `${folder.path}/${name}`;
    outputOf("ogr2ogr", [
      "-f",
      name.endsWith("shp") ? "ESRI Shapefile" : "GPKG",
      path,
      fixture("moor.geojson"),
      ...args,
    ]);
    return path;
  };

  test.each(["EPSG:3035", "EPSG:32632", "EPSG:4258", "EPSG:31287"])("made now, in %s", async (crs) => {
    const stem = `now-${crs.slice(5)}`;
    const path = convert(`${stem}.shp`, "-t_srs", crs, "-lco", "ENCODING=UTF-8");
    const made = (ending: string) => `${folder.path}/${stem}.${ending}`;
    const shapes = await read(path, { parts: { dbf: made("dbf"), prj: made("prj"), cpg: made("cpg") } });
    const layer = await read(convert(`${stem}.gpkg`, "-t_srs", crs));
    const text = outputOf("ogr2ogr", [
      "-f",
      "GeoJSON",
      "/vsistdout/",
      path,
      "-lco",
      "COORDINATE_PRECISION=15",
      "-lco",
      "RFC7946=NO",
    ]);
    const ogr = await read(folder.write(`${stem}.json`, text), { crs });
    expect(areas(shapes.catchments)).toEqual(
      areas(ogr.catchments).map(([id, name, rings, area]) => [id, name, rings, expect.closeTo(area, 3)]),
    );
    expect(areas(layer.catchments)).toEqual(
      areas(ogr.catchments).map(([id, name, rings, area]) => [id, name, rings, expect.closeTo(area, 3)]),
    );
    expect(layer.catchments[0].crs).toBe(crs);
  });
});
