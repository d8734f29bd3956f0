import { readFile } from "node:fs/promises";
import { join } from "node:path";
import { expect, test } from "vitest";
import { FOREIGN_TOOLS, FULL_DEVICE, outputOf, scratchFolder } from "../../test/foreign-tools.ts";
import { type Isohyet, writeGeoJson, writeIsohyets } from "./geojson.ts";

const folder = scratchFolder();
const path = join(folder, "isohyets.geojson");

/** An L, so that a turned or mirrored one shows. */
const ISOHYETS: readonly Isohyet[] = [
  {
    depthMm: 10,
    lines: [
      [
        [4.1234567891, 51.2],
        [4.1234567891, 51.4],
        [4.5, 51.4],
      ],
      [
        [5.5, 50.5],
        [5.5, 50.75],
        [5.5, 50.5],
      ],
    ],
  },
  { depthMm: 20.5, lines: [] },
  {
    depthMm: 40,
    lines: [
      [
        [4, 51],
        [4.00000001, 51],
      ],
    ],
  },
];

async function parsed() {
  return JSON.parse(await readFile(path, "utf8"));
}

test("lines of a depth are one feature, rounded to 6 decimals; what cannot be drawn is counted", async () => {
  expect(await writeIsohyets(path, ISOHYETS, { title: "demo" })).toEqual({ linesTooShort: 1 });
  expect(await parsed()).toEqual({
    type: "FeatureCollection",
    title: "demo",
    features: [
      {
        type: "Feature",
        properties: { depth_mm: 10 },
        geometry: {
          type: "MultiLineString",
          coordinates: [
            [
              [4.123457, 51.2],
              [4.123457, 51.4],
              [4.5, 51.4],
            ],
            [
              [5.5, 50.5],
              [5.5, 50.75],
              [5.5, 50.5],
            ],
          ],
        },
      },
    ],
  });
});

test("no line at all is still a collection", async () => {
  await writeIsohyets(path, []);
  expect(await parsed()).toEqual({ type: "FeatureCollection", features: [] });
});

test("a line over the 180° meridian is cut there, both ways", async () => {
  const lines = [
    [
      [179, 10],
      [-179, 20],
      [179, 30],
    ],
  ] as const;
  await writeIsohyets(path, [{ depthMm: 5, lines }]);
  // By hand: halfway between 179° and 181° lies the meridian, so the latitudes are 15 and 25.
  expect((await parsed()).features[0].geometry.coordinates).toEqual([
    [
      [179, 10],
      [180, 15],
    ],
    [
      [-180, 15],
      [-179, 20],
      [-180, 25],
    ],
    [
      [180, 25],
      [179, 30],
    ],
  ]);
});

test("a line that begins on the meridian itself is not bent", async () => {
  const lines = [
    [
      [180, 10],
      [-179, 20],
    ],
  ] as const;
  await writeIsohyets(path, [{ depthMm: 5, lines }]);
  expect((await parsed()).features[0].geometry.coordinates).toEqual([
    [
      [-180, 10],
      [-179, 20],
    ],
  ]);
});

test("points and polygons too, with properties in a fixed order and names as they are", async () => {
  const square = [
    [0, 0],
    [1, 0],
    [1, 1],
    [0, 0],
  ] as const;
  await writeGeoJson(path, [
    {
      id: "a",
      geometry: { type: "Point", coordinates: [-0.0000001, 1] },
      properties: { z: 1, a: "<b>\u0007" },
    },
    { geometry: { type: "MultiPolygon", coordinates: [[square]] }, properties: {} },
  ]);
  const text = await readFile(path, "utf8");
  expect(text).toContain('"properties":{"a":"<b>\\u0007","z":1}');
  const { features } = JSON.parse(text);
  expect(features[0]).toMatchObject({ id: "a", geometry: { coordinates: [0, 1] } });
  expect(Object.is(features[0].geometry.coordinates[0], 0)).toBe(true);
  expect(features[1].geometry.coordinates).toEqual([[square]]);
});

test.each([[[181, 0]], [[0, 91]], [[Number.NaN, 0]]] as const)("no such place: %j", async (coordinates) => {
  const feature = { geometry: { type: "Point", coordinates }, properties: {} } as const;
  await expect(writeGeoJson(path, [feature])).rejects.toThrow("no such place");
});

test("GeoJSON's own keys cannot be given", async () => {
  await expect(writeGeoJson(path, [], { type: "x" })).rejects.toBeInstanceOf(RangeError);
});

test.skipIf(!FULL_DEVICE)(
  "a full disk is a failure midway (skipped where there is no /dev/full)",
  async () => {
    await expect(writeIsohyets("/dev/full", ISOHYETS)).rejects.toMatchObject({ kind: "midway" });
  },
);

test.skipIf(!FOREIGN_TOOLS)(
  "ogrinfo finds the lines at their place (RAINRECKON_FOREIGN_TOOLS=1)",
  async () => {
    await writeIsohyets(path, ISOHYETS, { title: "demo", cautions: ["radar rain is an estimate"] });
    const text = outputOf("ogrinfo", ["-al", path]);
    expect(text).toContain("Geometry: Multi Line String");
    expect(text).toContain("Feature Count: 1");
    expect(text).toContain("Extent: (4.123457, 50.500000) - (5.500000, 51.400000)");
    expect(text).toContain('ID["EPSG",4326]');
    expect(text).toMatch(/depth_mm \((Integer|Real)\) = 10/);
    expect(text).toContain(
      "MULTILINESTRING ((4.123457 51.2,4.123457 51.4,4.5 51.4),(5.5 50.5,5.5 50.75,5.5 50.5))",
    );
  },
);
