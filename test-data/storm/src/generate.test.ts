import { createHash } from "node:crypto";
import { mkdtempSync, readdirSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { runStormCommand } from "./cli.ts";
import { GAUGES } from "./gauges.ts";
import { generateStorm } from "./generate.ts";
import { TRUTH_RATE_STEP_MM_PER_HOUR } from "./grids.ts";
import { TINY } from "./presets.ts";

const folder = mkdtempSync(join(tmpdir(), "storm-"));
const first = join(folder, "first");

beforeAll(async () => {
  await generateStorm({ ...TINY, folder: first });
});
afterAll(() => {
  rmSync(folder, { recursive: true });
});

/** One digest over the names and bytes of all files of a folder. */
function digest(of: string): string {
  const hash = createHash("sha256");
  for (const name of (readdirSync(of, { recursive: true }) as string[]).sort()) {
    if (!/\.\w+$/.test(name)) continue;
    hash.update(name).update(readFileSync(join(of, name)));
  }
  return hash.digest("hex");
}

function text(name: string): string {
  return readFileSync(join(first, name), "utf8");
}

function depths(name: string): Float32Array {
  const bytes = readFileSync(join(first, "truth", name));
  return new Float32Array(bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.length));
}

interface ToldGauge {
  readonly id: string;
  readonly network: string;
  readonly xM: number;
  readonly yM: number;
  readonly trueTotalMm: number;
  readonly fault: string | null;
}

function told(): {
  grid: { westM: number; northM: number; cellM: number; nx: number; ny: number };
  gauges: ToldGauge[];
  district: { meanMm: number; maximumMm: number };
  planted: { gaugeFaults: { gauge: string; fault: string }[] };
} {
  return JSON.parse(text("truth/truth.json"));
}

test("the same seed gives the same bytes at another time in another folder; another seed does not", async () => {
  await generateStorm({ ...TINY, folder: join(folder, "again") });
  await generateStorm({ ...TINY, seed: TINY.seed + 1, folder: join(folder, "other") });
  expect(digest(join(folder, "again"))).toBe(digest(first));
  expect(digest(join(folder, "other"))).not.toBe(digest(first));
});

describe("the truth", () => {
  test("hours add up to the total, and so do the one-minute rates, to their steps", () => {
    const total = depths("depth_total_mm.f32");
    const hour = depths("depth_hour_01_mm.f32");
    const bytes = gunzipSync(readFileSync(join(first, "truth", "rain_rate.u16.gz")));
    const rates = new Uint16Array(bytes.buffer, bytes.byteOffset, bytes.length / 2);
    expect(total.length).toBe(TINY.sizeKm ** 2);
    expect(rates.length).toBe(total.length * TINY.minutes);
    total.forEach((depth, cell) => {
      let sum = 0;
      for (let minute = 0; minute < TINY.minutes; minute++) sum += rates[minute * total.length + cell]!;
      const fromRates = (sum * TRUTH_RATE_STEP_MM_PER_HOUR) / 60;
      const rounding = (TINY.minutes * TRUTH_RATE_STEP_MM_PER_HOUR) / 60 / 2;
      if (Math.abs(fromRates - depth) > rounding + 1e-5)
        throw new Error(`cell ${cell}: ${fromRates}, ${depth}`);
      if (Math.abs(hour[cell]! - depth) > 1e-5) throw new Error(`cell ${cell}: the hour is not the total`);
    });
  });

  test("the district's mean and maximum are what was asked for, within a tenth", () => {
    const { district } = told();
    expect(Math.abs(district.meanMm / TINY.meanMm - 1)).toBeLessThan(0.1);
    expect(Math.abs(district.maximumMm / TINY.maximumMm - 1)).toBeLessThan(0.1);
  });

  test("a gauge's true depth lies between those of the cells around it", () => {
    const { grid, gauges } = told();
    const total = depths("depth_total_mm.f32");
    let checked = 0;
    for (const gauge of gauges) {
      if (gauge.fault === "outside-grid") continue;
      const column = Math.floor((gauge.xM - grid.westM) / grid.cellM);
      const row = Math.floor((grid.northM - gauge.yM) / grid.cellM);
      const around = [-1, 0, 1].flatMap((down) =>
        [-1, 0, 1].map((right) => total[(row + down) * grid.nx + column + right]!),
      );
      expect(gauge.trueTotalMm).toBeGreaterThanOrEqual(0.95 * Math.min(...around) - 0.05);
      expect(gauge.trueTotalMm).toBeLessThanOrEqual(1.05 * Math.max(...around) + 0.05);
      checked += 1;
    }
    expect(checked).toBe(GAUGES.length - 1);
  });
});

describe("the gauge files", () => {
  const rowsOf = (id: string): string[][] =>
    text("gauges/moor.csv")
      .split("\n")
      .filter((line) => line.startsWith(`${id},`))
      .map((line) => line.split(","));

  test("healthy gauges write their true depth, less what a tip and the turning bucket keep", () => {
    for (const { network, id, fault, trueTotalMm } of told().gauges) {
      if (network !== "moor" || fault !== null) continue;
      const written = rowsOf(id).reduce((sum, row) => sum + Number(row[2]), 0);
      expect(written).toBeLessThan(1.1 * trueTotalMm + 0.21);
      expect(written).toBeGreaterThan(0.8 * trueTotalMm - 0.21);
    }
  });

  test("stamps end their intervals, in UTC, the first five minutes after the start", () => {
    const rows = rowsOf("M01");
    expect(rows.map((row) => row[1])).toEqual([
      "2031-05-20T12:05:00Z",
      "2031-05-20T12:10:00Z",
      "2031-05-20T12:15:00Z",
      "2031-05-20T12:20:00Z",
    ]);
  });

  test("the saltwater network writes standard time all year, an hour before UTC's clock, summer or not", () => {
    const lines = text("gauges/saltwater.csv").trim().split("\n");
    expect(lines[0]!.split(",")).toHaveLength(12);
    expect(lines.slice(1).map((line) => line.split(",")[0])).toEqual([
      "2031-05-20 13:10",
      "2031-05-20 13:20",
    ]);
  });

  test("each planted fault stands in the files and in the truth", () => {
    const faults = new Map(told().planted.gaugeFaults.map(({ gauge, fault }) => [fault, gauge]));
    expect(faults.size).toBe(9);
    expect(rowsOf(faults.get("dead")!).every((row) => row[2] === "0.0")).toBe(true);
    expect(rowsOf(faults.get("spike")!).filter((row) => row[2] === "87.0")).toHaveLength(1);
    expect(rowsOf(faults.get("clock-60-min-late")!)[0]![1]).toBe("2031-05-20T13:05:00Z");
    expect(
      rowsOf(faults.get("dies-mid-storm")!)
        .slice(2)
        .every((row) => row[2] === "0.0"),
    ).toBe(true);
    const twice = rowsOf(faults.get("duplicated-line")!).map((row) => row.join(","));
    expect(twice.length - new Set(twice).size).toBe(1);
    const header = text("gauges/saltwater.csv").split("\n")[0]!.split(",");
    const empty = header.indexOf(faults.get("missing-hours")!);
    expect(text("gauges/saltwater.csv").split("\n")[1]!.split(",")[empty]).toBe("");
    expect(header).toContain(faults.get("no-station-entry")!);
    expect(text("gauges/saltwater_stations.csv")).not.toContain(faults.get("no-station-entry")!);
    expect(text("gauges/moor_stations.csv")).toMatch(/^007,/m);
    expect(text("gauges/moor_stations.csv")).toMatch(/^NO,/m);
  });

  test("the inch gauge writes its depth divided by 25.4", () => {
    const gauge = told().gauges.find(({ fault }) => fault === "inches-as-mm")!;
    const lines = text("gauges/saltwater.csv")
      .trim()
      .split("\n")
      .map((line) => line.split(","));
    const column = lines[0]!.indexOf(gauge.id);
    const inches = lines.slice(1).reduce((sum, row) => sum + Number(row[column]), 0);
    expect(Math.abs(inches * 25.4 - gauge.trueTotalMm)).toBeLessThan(0.2 * gauge.trueTotalMm + 0.21);
  });
});

test("catchments are closed rings: five, one concave, one with a hole, outer rings anticlockwise (RFC 7946)", () => {
  const { features } = JSON.parse(text("catchments.geojson")) as {
    features: { properties: { id: string }; geometry: { coordinates: [number, number][][] } }[];
  };
  expect(features.map(({ properties }) => properties.id)).toEqual([
    "SM-01",
    "SM-02",
    "SM-03",
    "SM-04",
    "SM-05",
  ]);
  expect(features.map(({ geometry }) => geometry.coordinates.length)).toEqual([1, 1, 2, 1, 1]);
  for (const { geometry } of features) {
    geometry.coordinates.forEach((ring, i) => {
      expect(ring[0]).toEqual(ring.at(-1));
      const doubledArea = ring
        .slice(1)
        .reduce((sum, [x, y], j) => sum + ring[j]![0] * y - x * ring[j]![1], 0);
      expect(Math.sign(doubledArea)).toBe(i === 0 ? 1 : -1);
    });
  }
});

test("sizes that do not fit together are refused", async () => {
  await expect(generateStorm({ ...TINY, folder, minutes: 17 })).rejects.toThrow(/whole number of rounds/);
  await expect(generateStorm({ ...TINY, folder, sizeKm: 61 })).rejects.toThrow(/even whole number/);
});

test("a misspelt preset ends with the usage and status 2", async () => {
  expect(await runStormCommand([folder, "--preset", "demmo"])).toBe(2);
});
