import { basename } from "node:path";
import { InputError, type Notice } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { scratchFolder } from "../../test/scratch.ts";
import { type CatchmentFields, readCatchments } from "./catchments.ts";
import { sniffMap } from "./sniff-map.ts";

const folder = scratchFolder();
let files = 0;

const square = (west: number, south: number, size = 1) => [
  [west, south],
  [west + size, south],
  [west + size, south + size],
  [west, south + size],
  [west, south],
];
const polygon = (...rings: unknown[]) => ({ type: "Polygon", coordinates: rings });
const feature = (properties: unknown, geometry: unknown, more: object = {}) => ({
  type: "Feature",
  properties,
  geometry,
  ...more,
});
const collection = (features: unknown[], more: object = {}) => ({
  type: "FeatureCollection",
  ...more,
  features,
});

function write(content: unknown): string {
  files += 1;
  const text = typeof content === "string" ? content : JSON.stringify(content);
  return folder.write(`map-${files}.geojson`, text);
}

async function read(content: unknown, fields: CatchmentFields = { id: "id", name: "name" }) {
  const notices: Notice[] = [];
  const catchments = await readCatchments(write(content), fields, (notice) => notices.push(notice));
  const told = notices.map(
    ({ what, where, fix }) => `${basename(where).replace(/-\d+/, "")}: ${what}; ${fix}`,
  );
  return { catchments, told };
}

const good = feature({ id: "SM-01", name: "Upper moor" }, polygon(square(4, 51)));

describe("catchments", () => {
  test("polygons with holes, many parts, heights, ids that are numbers, names that are absent", async () => {
    const { catchments, told } = await read(
      collection([
        feature({ id: "007", name: "Moor" }, polygon(square(4, 51, 3), square(5, 52))),
        feature({ id: 12 }, { type: "MultiPolygon", coordinates: [[square(4, 55)], [square(6, 55)]] }),
        feature(
          {},
          polygon([
            [9, 51, 12.5],
            [10, 51, 12.5],
            [10, 52, 12.5],
            [9, 51, 12.5],
          ]),
          { id: "own" },
        ),
      ]),
    );
    expect(catchments).toEqual([
      { id: "007", name: "Moor", polygons: [[square(4, 51, 3), square(5, 52)]] },
      { id: "12", name: "12", polygons: [[square(4, 55)], [square(6, 55)]] },
      {
        id: "own",
        name: "own",
        polygons: [
          [
            [
              [9, 51],
              [10, 51],
              [10, 52],
              [9, 51],
            ],
          ],
        ],
      },
    ]);
    expect(told).toEqual([]);
  });

  test("a single Feature, a byte order mark, an open ring", async () => {
    const open = feature({ id: "A" }, polygon(square(4, 51).slice(0, 4)));
    const { catchments, told } = await read(`\ufeff${JSON.stringify(open)}`);
    expect(catchments[0].polygons[0][0]).toEqual(square(4, 51));
    expect(told).toEqual([
      'map.geojson, feature 1: catchment "A": 1 rings were not closed, and are now; nothing to do',
    ]);
  });

  test.each([
    [
      "a point",
      { type: "Point", coordinates: [4, 51] },
      "it is a Point, not a Polygon or MultiPolygon: left out; give polygons",
    ],
    ["no geometry", null, "it has no geometry: left out; draw a polygon"],
    ["an empty polygon", polygon(), "its geometry is empty: left out; draw a polygon"],
    [
      "no coordinates",
      { type: "Polygon" },
      "its coordinates are not nested as in GeoJSON: left out; export it again",
    ],
    [
      "coordinates one level short",
      { type: "Polygon", coordinates: square(4, 51) },
      "its coordinates are not nested as in GeoJSON: left out; export it again",
    ],
    [
      "text for a number",
      polygon([
        ["4", 51],
        [5, 51],
        [5, 52],
        ["4", 51],
      ]),
      "a position is not two numbers: left out; export it again",
    ],
    [
      "three positions",
      polygon([
        [4, 51],
        [5, 51],
        [4, 51],
      ]),
      "a ring has fewer than four positions: left out; draw it again",
    ],
    [
      "a line",
      polygon([
        [4, 51],
        [5, 51],
        [6, 51],
        [4, 51],
      ]),
      "a ring encloses no area: left out; draw it again",
    ],
    [
      "a bow tie",
      polygon([
        [4, 51],
        [6, 53],
        [6, 51],
        [4, 53],
        [4, 51],
      ]),
      "its outline crosses itself near 5, 52: left out; repair the polygon",
    ],
    [
      "metres without a crs",
      polygon(square(450000, 5600000, 1000)),
      "the position 450000, 5600000 is not longitude and latitude: left out; name the coordinate system in the plan (catchments.crs)",
    ],
  ])("%s is left out and the rest goes on", async (_name, geometry, message) => {
    const { catchments, told } = await read(collection([feature({ id: "bad" }, geometry), good]));
    expect(catchments.map(({ id }) => id)).toEqual(["SM-01"]);
    expect(told).toEqual([`map.geojson, feature 1: catchment "bad": ${message}`]);
  });

  test("a feature without an id lists the properties there are, made harmless", async () => {
    const { told } = await read(
      collection([feature({ "HYDRO\u001b[2J_ID": 5 }, polygon(square(4, 51))), good]),
    );
    expect(told).toEqual([
      'map.geojson, feature 1: there is no id in the property "id": left out; name one of "HYDRO[2J_ID"',
    ]);
  });

  test("something that is no feature", async () => {
    const { told } = await read(collection([{ type: "Polygon" }, good]));
    expect(told).toHaveLength(1);
    expect(told[0]).toMatch(/^map\.geojson, feature 1: type: .*: left out; export the polygons again$/);
  });

  test("one id for two shapes: neither can be meant; the same feature twice counts once", async () => {
    const { catchments, told } = await read(
      collection([
        feature({ id: "A" }, polygon(square(4, 51))),
        feature({ id: "A" }, polygon(square(6, 51))),
        good,
        good,
      ]),
    );
    expect(catchments.map(({ id }) => id)).toEqual(["SM-01"]);
    expect(told).toEqual([
      'map.geojson, feature 2: catchment "A" has the id of feature 1 and another shape: both are left out; join the parts into one MultiPolygon, or give each an id of its own',
      'map.geojson, feature 4: catchment "SM-01" is the same as feature 3: counted once; nothing to do',
    ]);
  });
});

describe("coordinate systems", () => {
  const named = (name: string) => ({ crs: { type: "name", properties: { name } } });
  const metres = [feature({ id: "A" }, polygon(square(450000, 5600000, 1000)))];

  // Forms of names: OGC 09-048r5 (URN), OGC 07-092r1; the crs member as in the GeoJSON specification of 2008.
  test.each([
    ["urn:ogc:def:crs:EPSG::25832", "EPSG:25832"],
    ["urn:ogc:def:crs:EPSG:6.9:25832", "EPSG:25832"],
    ["http://www.opengis.net/def/crs/EPSG/0/25832", "EPSG:25832"],
    ["EPSG:25832", "EPSG:25832"],
    ["epsg:31370", "EPSG:31370"],
  ])("%s is %s", async (name, crs) => {
    const { catchments } = await read(collection(metres, named(name)));
    expect(catchments[0].crs).toBe(crs);
  });

  test.each([
    "urn:ogc:def:crs:OGC:1.3:CRS84",
    "urn:ogc:def:crs:OGC::CRS84",
    "EPSG:4326",
    "urn:ogc:def:crs:EPSG::4326",
  ])("%s is longitude, latitude", async (name) => {
    const { catchments } = await read(collection([good], named(name)));
    expect("crs" in catchments[0]).toBe(false);
  });

  test("the plan's crs goes over the file's", async () => {
    const { catchments } = await read(collection(metres), { id: "id", crs: "EPSG:3035" });
    expect(catchments[0].crs).toBe("EPSG:3035");
  });

  test.each([
    [
      { crs: { type: "link", properties: { href: "http://example.org" } } },
      "the file's crs is not given by name",
    ],
    [named("Gauss's own"), "the file's crs \"Gauss's own\" cannot be understood"],
  ])("%j cannot be followed", async (crs, what) => {
    await expect(read(collection([good], crs))).rejects.toMatchObject({ what });
  });
});

describe("files that cannot be read at all", () => {
  test.each([
    ['{"type": "FeatureCollection",\n"features": [}', "this is not valid JSON", /, line 2, column 14$/],
    ['{"type": "FeatureCollection", "feat', "this is not valid JSON", /, line 1, column \d+$/],
    ["[]", "this is no GeoJSON FeatureCollection or Feature", /geojson$/],
    ['{"type":"Polygon","coordinates":[]}', "this is no GeoJSON FeatureCollection or Feature", /geojson$/],
    ['{"type":"FeatureCollection"}', "this is no GeoJSON FeatureCollection or Feature", /geojson$/],
    ['{"type":"FeatureCollection","features":[]}', "no catchment is left", /geojson$/],
  ])("%s", async (text, what, where) => {
    const fault = await read(text).catch((thrown: unknown) => thrown);
    expect(fault).toBeInstanceOf(InputError);
    expect(fault).toMatchObject({ what, where: expect.stringMatching(where) });
  });

  test("a file that is not there", async () => {
    await expect(readCatchments(`${folder.path}/absent`, { id: "id" }, () => {})).rejects.toMatchObject({
      what: "the file cannot be opened",
    });
  });
});

describe("a look at a GeoJSON file", () => {
  test("counts, fields that may be the id or the name, bounds", async () => {
    const path = write(
      collection([
        feature({ AREA: 1.5, code: "A-1", label: "Moor", same: 1 }, polygon(square(4, 51))),
        feature({ AREA: 2.5, code: "A-2", label: "Moor", same: 1 }, polygon(square(6, 52))),
        feature({ kind: "outlet" }, { type: "Point", coordinates: [90, 10] }),
      ]),
    );
    expect(await sniffMap(path)).toEqual({
      format: "GeoJSON",
      crsKnown: true,
      featureCount: 3,
      polygonCount: 2,
      fields: [
        { name: "AREA", filled: 2, distinct: 2, type: "number" },
        { name: "code", filled: 2, distinct: 2, type: "text" },
        { name: "label", filled: 2, distinct: 1, type: "text" },
        { name: "same", filled: 2, distinct: 1, type: "number" },
      ],
      idFields: ["code", "AREA"],
      nameFields: ["label", "code"],
      bounds: [4, 51, 7, 53],
    });
  });

  test("other files are no GeoJSON; a broken one is an error that says where", async () => {
    expect(await sniffMap(write('{"a": 1}'))).toBeUndefined();
    expect(await sniffMap(write("time,gauge,value"))).toBeUndefined();
    expect(await sniffMap(write(""))).toBeUndefined();
    await expect(sniffMap(write('{"type": "FeatureCollection", "features": ['))).rejects.toBeInstanceOf(
      InputError,
    );
  });
});
