import { spawnSync } from "node:child_process";
import { readFileSync } from "node:fs";
import path from "node:path";
import { inflateSync } from "node:zlib";
import geodesicLibrary from "geographiclib-geodesic";
import { beforeAll, describe, expect, test } from "vitest";
import { RAYS, SWEEP_SECONDS, storedDbz, writeVolume } from "./odim-scans.ts";
import { ensureBuilt } from "./run-cli.ts";
import {
  arrayOf,
  csvRows,
  FOREIGN,
  manifestOf,
  NO_ECHO_WORK,
  planFor,
  type ReadArray,
  readNetCdf,
  scratchFolder,
  total,
  writeIn,
} from "./total-kit.ts";

// One radar sees an L that nothing turns or mirrors into itself: a long leg outwards, a short one at its far end,
// to the right. Where the L lies on Earth is told by GeographicLib (Karney, 2013, J. Geodesy 87, 43-55), not by us.
const RADAR = { node: "zzell", lonDeg: 3.2, latDeg: 52.4, gateM: 500, gateCount: 200 };
const ELEVATION_DEG = 0.5;
const LONG_LEG = { fromAzimuthDeg: 60, toAzimuthDeg: 66, fromM: 35_000, toM: 60_000 };
const SHORT_LEG = { fromAzimuthDeg: 60, toAzimuthDeg: 78, fromM: 54_000, toM: 60_000 };
const DBZ = 40;
// Z = 200 R^1.6 (Marshall, Hitschfeld and Gunn, 1955), one hour of it: mm.
const DEPTH_MM = (10 ** (DBZ / 10) / 200) ** (1 / 1.6);
const FROM = Date.UTC(2031, 5, 1, 12);
const HOUR_MS = 3_600_000;

const earth = geodesicLibrary.Geodesic.WGS84;
const folder = scratchFolder("place");
const run = path.join(folder, "run");
let arrays: ReadonlyMap<string, ReadArray>;

interface Leg {
  readonly fromAzimuthDeg: number;
  readonly toAzimuthDeg: number;
  readonly fromM: number;
  readonly toM: number;
}

/** How far a place lies inside a leg (negative: outside), m, to the nearest of its four sides. */
function depthInside(leg: Leg, azimuthDeg: number, rangeM: number): number {
  const across = (deg: number) => ((deg * Math.PI) / 180) * rangeM;
  return Math.min(
    rangeM - leg.fromM,
    leg.toM - rangeM,
    across(azimuthDeg - leg.fromAzimuthDeg),
    across(leg.toAzimuthDeg - azimuthDeg),
  );
}

/** The same for the L: what is deep inside either leg is deep inside it. */
function insideL(lonDeg: number, latDeg: number): number {
  const { azi1 = 0, s12 = 0 } = earth.Inverse(RADAR.latDeg, RADAR.lonDeg, latDeg, lonDeg);
  const azimuthDeg = (azi1 + 360) % 360;
  // Slant range over ground range at half a degree of elevation and 60 km: less than 20 m more.
  return Math.max(depthInside(LONG_LEG, azimuthDeg, s12), depthInside(SHORT_LEG, azimuthDeg, s12));
}

/** Longitude and latitude of a place seen from the radar. */
function seen(azimuthDeg: number, rangeM: number): [lonDeg: number, latDeg: number] {
  const { lon2 = Number.NaN, lat2 = Number.NaN } = earth.Direct(
    RADAR.latDeg,
    RADAR.lonDeg,
    azimuthDeg,
    rangeM,
  );
  return [lon2, lat2];
}

const IN_LONG_LEG = seen(63, 42_000);
const IN_SHORT_LEG = seen(73, 57_000);
/** Where the L would be, were it mirrored, turned, or had azimuth been counted from east. */
const WHERE_IT_IS_NOT = [
  seen(63 - 3 - 10, 57_000),
  seen(360 - 63, 42_000),
  seen(180 - 63, 42_000),
  seen(180 + 63, 42_000),
  seen(90 - 63, 42_000),
  seen(73, 42_000),
];

/** A square around a place, sides along the parallels. */
function square(id: string, [lonDeg, latDeg]: readonly [number, number], halfKm: number): object {
  const [dLat, dLon] = [halfKm / 111.2, halfKm / (111.2 * Math.cos((latDeg * Math.PI) / 180))];
  const corners = [
    [-1, -1],
    [1, -1],
    [1, 1],
    [-1, 1],
    [-1, -1],
  ].map(([east, north]) => [lonDeg + east! * dLon, latDeg + north! * dLat]);
  return {
    type: "Feature",
    properties: { id, name: `Square ${id}` },
    geometry: { type: "Polygon", coordinates: [corners] },
  };
}

beforeAll(async () => {
  ensureBuilt();
  const stored = new Uint8Array(RAYS * RADAR.gateCount);
  for (let ray = 0; ray < RAYS; ray++) {
    for (let gate = 0; gate < RADAR.gateCount; gate++) {
      const wet = [LONG_LEG, SHORT_LEG].some(
        (leg) => depthInside(leg, ray + 0.5, (gate + 0.5) * RADAR.gateM) > 0,
      );
      if (wet) stored[ray * RADAR.gateCount + gate] = storedDbz(DBZ);
    }
  }
  for (let minute = -5; minute <= 60; minute += 5) {
    const startEpochMs = FROM + minute * 60_000 - (SWEEP_SECONDS / 2) * 1000;
    const name = `scan-${String(minute + 5).padStart(2, "0")}.h5`;
    await writeVolume(path.join(folder, "scans", name), RADAR, [
      { elevationDeg: ELEVATION_DEG, startEpochMs, stored },
    ]);
  }
  // The long leg is 4.4 km wide here: a square of 2 km lies inside it, its neighbour to the north-west is dry.
  const features = [square("wet", IN_LONG_LEG, 1), square("dry", seen(50, 42_000), 1)];
  writeIn(folder, "catchments.geojson", JSON.stringify({ type: "FeatureCollection", features }));
  const plan = planFor(folder, (document) => {
    document.setIn(["window", "from"], new Date(FROM).toISOString());
    document.setIn(["window", "to"], new Date(FROM + HOUR_MS).toISOString());
    // As wide as the radar looks, so that the L can be missed.
    const grid = {
      ...(document.toJS() as { grid: object }).grid,
      westM: -90_000,
      northM: 90_000,
      nx: 180,
      ny: 180,
    };
    document.set("grid", document.createNode(grid));
    // An L that never moves is what static echo looks like.
    document.set("echo", document.createNode(NO_ECHO_WORK));
  });
  const { status, stderr } = total(plan, "run");
  if (status !== 0) throw new Error(`total ended with ${status}: ${stderr}`);
  arrays = await readNetCdf(path.join(run, "totals.nc"));
});

const array = (name: string) => arrayOf(arrays, name).values;

/** The cell of totals.nc whose centre lies nearest to a place, by its lat and lon variables. */
function cellAt([lonDeg, latDeg]: readonly [number, number]): number {
  const [lon, lat] = [array("lon"), array("lat")];
  let [best, bestM] = [-1, Infinity];
  for (let cell = 0; cell < lon.length; cell++) {
    // Far cells need no geodesic.
    if (Math.abs(lat[cell]! - latDeg) > 0.05) continue;
    const { s12 = Infinity } = earth.Inverse(latDeg, lonDeg, lat[cell]!, lon[cell]!);
    if (s12 < bestM) [best, bestM] = [cell, s12];
  }
  expect(bestM).toBeLessThan(750);
  return best;
}

describe("one asymmetric wet pattern lies at its place on Earth", () => {
  test("in totals.nc: full depth inside the L, nothing outside it", () => {
    const [lon, lat, depth, observed] = [
      array("lon"),
      array("lat"),
      array("radar_total"),
      array("observed_fraction"),
    ];
    let [inside, outside] = [0, 0];
    for (let cell = 0; cell < lon.length; cell++) {
      if (Number.isNaN(depth[cell])) continue;
      expect(observed[cell]).toBeCloseTo(1, 6);
      const deep = insideL(lon[cell]!, lat[cell]!);
      // A cell reaches 707 m from its centre to its corners, a gate 250 m and half a degree.
      if (deep > 1000) {
        inside++;
        expect(Math.abs(depth[cell]! - DEPTH_MM)).toBeLessThan(1e-3);
      } else if (deep < -1500) {
        outside++;
        expect(depth[cell]).toBe(0);
      }
    }
    expect(inside).toBeGreaterThan(60);
    expect(outside).toBeGreaterThan(20_000);
    for (const place of [IN_LONG_LEG, IN_SHORT_LEG]) expect(depth[cellAt(place)]).toBeCloseTo(DEPTH_MM, 3);
    for (const place of WHERE_IT_IS_NOT) expect(depth[cellAt(place)]).toBe(0);
  });

  test("in isohyets.geojson: lines around the L and around nothing else", () => {
    const { features } = JSON.parse(readFileSync(path.join(run, "isohyets.geojson"), "utf8")) as {
      features: { properties: { depth_mm: number }; geometry: { coordinates: [number, number][][] } }[];
    };
    expect(features.length).toBeGreaterThan(0);
    const around = (place: readonly [number, number], lines: readonly [number, number][][]) => {
      // Crossings of the parallel to the east of the place; odd is inside.
      let crossings = 0;
      for (const line of lines) {
        for (let k = 1; k < line.length; k++) {
          const [a, b] = [line[k - 1]!, line[k]!];
          if (a[1] > place[1] === b[1] > place[1]) continue;
          const lon = a[0] + ((place[1] - a[1]) / (b[1] - a[1])) * (b[0] - a[0]);
          if (lon > place[0]) crossings++;
        }
      }
      return crossings % 2 === 1;
    };
    for (const { geometry } of features) {
      for (const place of [IN_LONG_LEG, IN_SHORT_LEG]) expect(around(place, geometry.coordinates)).toBe(true);
      for (const place of WHERE_IT_IS_NOT) expect(around(place, geometry.coordinates)).toBe(false);
      for (const [lon, lat] of geometry.coordinates.flat())
        expect(Math.abs(insideL(lon, lat))).toBeLessThan(1500);
    }
  });

  test("in catchments.csv: in its catchment and not in the neighbour", () => {
    const hour = csvRows(path.join(run, "catchments.csv")).filter(
      (row) => row.start === "2031-06-01T12:00:00Z" && row.end === "2031-06-01T13:00:00Z",
    );
    expect(hour.map((row) => [row.catchment_id, row.depth_mm, row.observed_fraction])).toEqual([
      ["wet", DEPTH_MM.toFixed(3), "1.0000"],
      ["dry", "0.000", "1.0000"],
    ]);
    // Two kilometres square; the projection keeps areas, and the sides were laid out on a sphere.
    for (const row of hour) expect(Math.abs(Number(row.area_km2) - 4)).toBeLessThan(0.04);
    expect(manifestOf(run).notices.map(({ what }) => what)).toEqual([]);
  });

  test("in report.html: in the picture of the total", () => {
    const report = readFileSync(path.join(run, "report.html"), "utf8");
    const layer = /<g class="layer layer-0">[\s\S]*?href="data:image\/png;base64,([^"]+)"/.exec(report);
    const picture = readPalettePng(Buffer.from(layer![1]!, "base64"));
    expect([picture.width, picture.height]).toEqual([180, 180]);
    const colourAt = (place: readonly [number, number]) => picture.colourAt(cellAt(place));
    const dry = colourAt(WHERE_IT_IS_NOT[0]!);
    for (const place of WHERE_IT_IS_NOT) expect(colourAt(place)).toBe(dry);
    const wet = colourAt(IN_LONG_LEG);
    expect(wet).not.toBe(dry);
    expect(colourAt(IN_SHORT_LEG)).toBe(wet);
    const depth = array("radar_total");
    for (let cell = 0; cell < depth.length; cell++) {
      if (depth[cell] === 0) expect(picture.colourAt(cell)).toBe(dry);
      if (Math.abs(depth[cell]! - DEPTH_MM) < 1e-3) expect(picture.colourAt(cell)).toBe(wet);
      if (Number.isNaN(depth[cell])) expect(picture.colourAt(cell)).toBe("clear");
    }
  });
});

describe("what the report's page is told", () => {
  interface Stored {
    nx: number;
    ny: number;
    block: number;
    step: number;
    offset: number;
    count: number;
    data: string;
  }
  interface Told {
    map: {
      nx: number;
      ny: number;
      lattice: { across: number; down: number; lonDeg: number[]; latDeg: number[] };
    };
    layers: {
      id: string;
      group: string;
      field: Stored;
      frames?: { intervals: number[][]; fields: Stored };
    }[];
  }
  const told = (): Told => {
    const report = readFileSync(path.join(run, "report.html"), "utf8");
    return JSON.parse(/id="report-data">(.*?)<\/script>/s.exec(report)![1]!) as Told;
  };

  /** Values of all fields, read as the page's contract says: differences along rows, low bytes before high ones. */
  function valuesOf({ nx, ny, step, offset, count, data }: Stored): number[] {
    const bytes = inflateSync(Buffer.from(data, "base64"));
    const all = nx * ny * count;
    let left = 0;
    return Array.from({ length: all }, (_, at) => {
      left = ((at % nx === 0 ? 0 : left) + bytes[at]! + 256 * bytes[all + at]!) % 65_536;
      return left === 0 ? Number.NaN : offset + (left - 1) * step;
    });
  }

  test("the total lies in its cells, and its one hour is the total", () => {
    const layer = told().layers.find(({ id }) => id === "radar-total")!;
    const total = valuesOf(layer.field);
    const depth = array("radar_total");
    for (const [cell, mm] of total.entries()) {
      if (Number.isNaN(depth[cell])) expect(mm).toBeNaN();
      else expect(Math.abs(mm - depth[cell]!)).toBeLessThanOrEqual(0.0501);
    }
    expect(layer.frames?.intervals).toEqual([[FROM, FROM + HOUR_MS]]);
    expect(valuesOf(layer.frames!.fields)).toEqual(total);
  });

  test("corners of the lattice lie on Earth where the grid does", () => {
    const { map } = told();
    const lon = array("lon");
    const lat = array("lat");
    const { across, lonDeg, latDeg } = map.lattice;
    // The middle of the grid is a corner of the lattice and of four cells: their mean, to the last digit kept.
    const corner = (map.lattice.down / 2) * (across + 1) + across / 2;
    const [column, row] = [map.nx / 2, map.ny / 2];
    const around = [row - 1, row].flatMap((r) => [column - 1, column].map((c) => r * map.nx + c));
    const mean = (of: ArrayLike<number>) => around.reduce((sum, cell) => sum + of[cell]!, 0) / 4;
    expect(Math.abs(lonDeg[corner]! - mean(lon))).toBeLessThan(2e-4);
    expect(Math.abs(latDeg[corner]! - mean(lat))).toBeLessThan(2e-4);
  });
});

/** What a program of other people prints. */
function tool(name: string, args: readonly string[], input?: string): string {
  const { stdout, status, stderr, error } = spawnSync(name, args, {
    encoding: "utf8",
    ...(input === undefined ? {} : { input }),
  });
  if (error !== undefined) throw error;
  if (status !== 0) throw new Error(`${name} ended with ${status}: ${stderr}`);
  return stdout;
}

describe.skipIf(!FOREIGN)("read by other people's tools (skipped unless RAINRECKON_FOREIGN_TOOLS=1)", () => {
  const places = [IN_LONG_LEG, IN_SHORT_LEG, ...WHERE_IT_IS_NOT];
  const expected = [DEPTH_MM, DEPTH_MM, ...WHERE_IT_IS_NOT.map(() => 0)];
  const asked = places.map(([lon, lat]) => `${lon} ${lat}`).join("\n");

  test.each([
    ["GeoTIFF", () => path.join(run, "radar_total.tif")],
    ["NetCDF", () => `NETCDF:${path.join(run, "totals.nc")}:radar_total`],
  ] as const)("gdallocationinfo finds the depths in the %s by longitude and latitude", (_, file) => {
    const found = tool("gdallocationinfo", ["-valonly", "-wgs84", file()], `${asked}\n`);
    const values = found.trim().split("\n").map(Number);
    expect(values.length).toBe(expected.length);
    for (const [k, value] of values.entries()) expect(Math.abs(value - expected[k]!)).toBeLessThan(1e-3);
  });

  test("ncdump shows a CF file with a grid mapping and bounds of time", () => {
    const header = tool("ncdump", ["-h", path.join(run, "totals.nc")]);
    expect(header).toMatch(/radar_total:grid_mapping = "crs"/);
    expect(header).toMatch(/crs:grid_mapping_name = "lambert_azimuthal_equal_area"/);
    expect(header).toMatch(/time:bounds = "time_bnds"/);
    expect(header).toMatch(/radar_total:units = "mm"/);
    expect(header).toMatch(/radar_total:_FillValue = NaNf/);
  });

  test("ogrinfo reads the isohyets as lines in WGS 84", () => {
    const told = tool("ogrinfo", ["-al", "-so", path.join(run, "isohyets.geojson")]);
    expect(told).toMatch(/Geometry: Multi Line String/);
    expect(told).toMatch(/WGS 84/);
  });
});

interface Picture {
  readonly width: number;
  readonly height: number;
  /** "clear" where nothing is drawn, else the colour. */
  colourAt(cell: number): string;
}

/** Reads a palette PNG of eight bits whose rows are not filtered (W3C PNG specification). */
function readPalettePng(bytes: Buffer): Picture {
  const parts = new Map<string, Buffer>();
  for (let at = 8; at < bytes.length; ) {
    const length = bytes.readUInt32BE(at);
    const type = bytes.toString("latin1", at + 4, at + 8);
    const earlier = parts.get(type) ?? Buffer.alloc(0);
    parts.set(type, Buffer.concat([earlier, bytes.subarray(at + 8, at + 8 + length)]));
    at += 12 + length;
  }
  const part = (type: string) => parts.get(type) ?? Buffer.alloc(0);
  const [width, height] = [part("IHDR").readUInt32BE(0), part("IHDR").readUInt32BE(4)];
  expect([part("IHDR")[8], part("IHDR")[9]], "eight bits, palette").toEqual([8, 3]);
  const rows = inflateSync(part("IDAT"));
  return {
    width,
    height,
    colourAt(cell) {
      const start = Math.floor(cell / width) * (width + 1);
      expect(rows[start], "no filter").toBe(0);
      const index = rows[start + 1 + (cell % width)]!;
      if (part("tRNS")[index] === 0) return "clear";
      return part("PLTE")
        .subarray(3 * index, 3 * index + 3)
        .toString("hex");
    },
  };
}
