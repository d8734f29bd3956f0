import { execFileSync } from "node:child_process";
import { existsSync, readdirSync, readFileSync, writeFileSync } from "node:fs";
import path from "node:path";
import { beforeAll, describe, expect, test } from "vitest";
import { exportSchema } from "../src/export/schema.ts";
import {
  planText,
  RATE_MM_PER_HOUR,
  SOUND_AREA,
  SOUND_GAUGES,
  STEP_MM,
  writeAreas,
  writeGauges,
  writeScans,
} from "./even-rain.ts";
import { inProcess } from "./run-cli.ts";
import { csvRows, FOREIGN, scratchFolder, writeIn } from "./total-kit.ts";

// An hour of even rain, but for noise of half a decibel, with a hole from 12:20 to 12:40, longer than is bridged: what is exported is known by hand.
const scratch = scratchFolder("export");
const RUN = path.join(scratch, "run");
/** An id of digits, which must not become a number. */
const ASSETS = "id,name,lon,lat\n007,Pump,3.1,52.6\n";
const at = (name: string) => path.join(scratch, "out", name);

beforeAll(async () => {
  await writeScans(scratch, [25, 30, 35]);
  writeGauges(scratch, SOUND_GAUGES);
  writeAreas(scratch, [SOUND_AREA]);
  writeIn(scratch, "assets.csv", ASSETS);
  const assets = "{ file: assets.csv, columns: { id: id, name: name, x: lon, y: lat } }";
  const plan = writeIn(scratch, "plan.yaml", planText({ assets }));
  const { status, stderr } = await inProcess(["total", plan, "--out", RUN, "--members", "2"]);
  if (status !== 0) throw new Error(stderr);
});

const exported = (...args: readonly string[]) => inProcess(["export", ...args]);

describe("series", () => {
  test("every step has a row, and one that was not observed its code, never 0", async () => {
    const { status, stdout } = await exported("series", RUN, "-o", at("rain.csv"), "--value", "radar");
    expect(status).toBe(0);
    expect(stdout).toContain("12 steps of 5 min, 1 catchment, depth in mm");
    const rows = csvRows(at("rain.csv"));
    expect(rows.map((row) => row.step_end_utc)).toEqual(
      Array.from({ length: 12 }, (_, k) =>
        k < 11 ? `2031-06-01T12:${String(5 * k + 5).padStart(2, "0")}:00Z` : "2031-06-01T13:00:00Z",
      ),
    );
    const depths = rows.map((row) => row.A_mm);
    expect(depths.slice(4, 8)).toEqual(["-999", "-999", "-999", "-999"]);
    for (const depth of [...depths.slice(0, 4), ...depths.slice(8)])
      expect(Math.abs(Number(depth) / STEP_MM - 1)).toBeLessThan(0.05);
  });

  test("longer steps hold the same water, and half an observed one is none", async () => {
    const { stdout } = await exported(
      ...["series", RUN, "-o", at("quarter.csv"), "--value", "radar", "--step", "PT10M", "--json"],
    );
    const report = exportSchema.parse(JSON.parse(stdout));
    expect([report.rows, report.missing]).toEqual([6, 2]);
    const fives = csvRows(at("rain.csv")).map((row) => Number(row.A_mm));
    const tens = csvRows(at("quarter.csv")).map((row) => row.A_mm);
    expect(tens).toEqual(
      [0, 1, 2, 3, 4, 5].map((k) =>
        k === 2 || k === 3 ? "-999" : (fives[2 * k]! + fives[2 * k + 1]!).toFixed(3),
      ),
    );
  });

  test("rate, stamp, clock and code are as the model wants them", async () => {
    const asked = ["--as", "rate", "--stamp", "start", "--offset", "+01:00", "--missing", "NaN"];
    await exported("series", RUN, "-o", at("rate.csv"), "--value", "radar", ...asked);
    const rows = csvRows(at("rate.csv"));
    expect(rows[0]!["step_start_+01:00"]).toBe("2031-06-01T13:00:00+01:00");
    expect(Math.abs(Number(rows[0]!.A_mm_per_h) / RATE_MM_PER_HOUR - 1)).toBeLessThan(0.05);
    expect(rows[5]!.A_mm_per_h).toBe("NaN");
  });

  test("whole steps follow the clock of the stamps: what the window covers in part is missing", async () => {
    await exported("series", RUN, "-o", at("half.csv"), "--step", "PT30M", "--offset", "+00:15");
    expect(csvRows(at("half.csv")).map((row) => Object.values(row))).toEqual([
      ["2031-06-01T12:30:00+00:15", "-999"],
      ["2031-06-01T13:00:00+00:15", "-999"],
      ["2031-06-01T13:30:00+00:15", "-999"],
    ]);
  });

  test("assets have a series too, of their cell", async () => {
    await exported("series", RUN, "-o", at("assets.csv"), "--of", "assets", "--value", "radar");
    const [first] = csvRows(at("assets.csv"));
    expect(Math.abs(Number(first!["007_mm"]) / STEP_MM - 1)).toBeLessThan(0.08);
  });

  test("members have a column each, over the intervals of the maps", async () => {
    const { stdout } = await exported("series", RUN, "-o", at("members.csv"), "--of", "members");
    expect(stdout).toContain("1 step of 1 h, 2 series of members");
    const [row] = csvRows(at("members.csv"));
    const table = csvRows(path.join(RUN, "members_catchments.csv"));
    expect(Object.values(row!).slice(1)).toEqual(table.map(({ depth_mm }) => depth_mm));
    expect(Object.keys(row!).slice(1)).toEqual(["A_member_001_mm", "A_member_002_mm"]);
  });

  test("inches are millimetres over 25.4, and best is what was adjusted", async () => {
    await exported("series", RUN, "-o", at("inches.csv"), "--units", "in");
    const [first] = csvRows(at("inches.csv"));
    const best = csvRows(path.join(RUN, "catchments.csv")).find((row) => row.end === "2031-06-01T12:05:00Z");
    expect(best!.depth_mm).toBe(best!.adjusted_mm);
    expect(Number(first!.A_in)).toBeCloseTo(Number(best!.depth_mm) / 25.4, 5);
  });
});

test("maps hold an interval each, and other programs know where and what they are", async () => {
  const { status } = await exported("maps", RUN, "-o", at("maps"), "--value", "radar");
  expect(status).toBe(0);
  expect(readdirSync(at("maps"))).toEqual(["radar_depth_20310601T120000Z_20310601T130000Z.tif"]);
  if (!FOREIGN) return;
  const info = execFileSync("gdalinfo", ["-stats", path.join(at("maps"), readdirSync(at("maps"))[0]!)], {
    encoding: "utf8",
  });
  expect(info).toContain("Size is 80, 80");
  expect(info).toContain("Unit Type: mm");
  // Forty minutes of the hour were observed; the noise of the echo is half a decibel: 10^(0.05/1.6) = 1.075.
  const most = Number(/STATISTICS_MAXIMUM=([\d.]+)/.exec(info)?.[1]);
  expect(Math.abs(most / (8 * STEP_MM) - 1)).toBeLessThan(0.08);
});

test("the weights of a catchment add up to 1, and to its area", async () => {
  const { status, stdout } = await exported("weights", RUN, "-o", at("weights.csv"));
  expect([status, stdout]).toEqual([0, expect.stringContaining("of 1 catchment")]);
  const rows = csvRows(at("weights.csv"));
  const sum = (name: string) => rows.reduce((total, row) => total + Number(row[name]), 0);
  expect(sum("weight")).toBeCloseTo(1, 6);
  const [catchment] = csvRows(path.join(RUN, "catchments.csv"));
  expect(sum("cell_fraction")).toBeCloseTo(Number(catchment!.area_km2), 2);
  const corner = rows[0]!;
  expect(Number(corner.x_m)).toBe(-40_000 + (Number(corner.column) + 0.5) * 1000);
  expect(Number(corner.y_m)).toBe(40_000 - (Number(corner.row) + 0.5) * 1000);
});

test("pairs become Parquet with a row for each", async () => {
  const { stdout } = await exported("pairs", RUN, "-o", at("pairs.parquet"), "--json");
  expect(JSON.parse(stdout)).toMatchObject({ rows: csvRows(path.join(RUN, "pairs.csv")).length });
  const bytes = readFileSync(at("pairs.parquet"));
  expect([bytes.subarray(0, 4).toString(), bytes.subarray(-4).toString()]).toEqual(["PAR1", "PAR1"]);
});

test("tables in inches rename their columns, and ids of digits stay ids", async () => {
  await exported("tables", RUN, "--units", "in", "-o", at("inches"));
  expect(readdirSync(at("inches")).sort()).toEqual(
    readdirSync(RUN)
      .filter((f) => f.endsWith(".csv"))
      .sort(),
  );
  const [mm] = csvRows(path.join(RUN, "pairs.csv"));
  const [inches] = csvRows(path.join(at("inches"), "pairs.csv"));
  expect(Object.keys(inches!)).toEqual(Object.keys(mm!).map((name) => name.replace(/_mm$/, "_in")));
  expect(Number(inches!.gauge_in) * 25.4).toBeCloseTo(Number(mm!.gauge_mm), 3);
  expect([inches!.gauge_id, inches!.range_km]).toEqual([mm!.gauge_id, mm!.range_km]);
});

describe("what cannot be done is said in one go, and leaves nothing behind", () => {
  test.each([
    [
      "a code that is a depth",
      ["series", RUN, "-o", at("no.csv"), "--missing", "0"],
      /0 and what is above it/,
    ],
    [
      "a step that fits no day",
      ["series", RUN, "-o", at("no.csv"), "--step", "PT7M"],
      /does not divide a day/,
    ],
    ["the folder of the run", ["series", RUN, "-o", path.join(RUN, "no.csv")], /stays as total left it/],
    ["no run", ["series", scratch, "-o", at("no.csv")], /no finished run/],
    ["adjusted maps of another value", ["maps", RUN, "-o", at("x"), "--value", "good"], /allowed choices/i],
    ["a clock that is none", ["series", RUN, "-o", at("no.csv"), "--offset", "+25:00"], /write UTC/],
  ])("%s", async (_, args, words) => {
    const { status, stderr } = await exported(...args);
    expect([status, stderr]).toEqual([2, expect.stringMatching(words)]);
    expect(existsSync(at("no.csv"))).toBe(false);
  });

  test("a file that is there stays, unless it may go", async () => {
    const file = at("weights.csv");
    const { status, stderr } = await exported("weights", RUN, "-o", file);
    expect([status, stderr]).toEqual([2, expect.stringContaining("--force")]);
    expect((await exported("weights", RUN, "-o", file, "--force")).status).toBe(0);
  });

  test("a table that was changed since the run is not passed on", async () => {
    const table = path.join(RUN, "catchments.csv");
    const text = readFileSync(table, "utf8");
    writeFileSync(table, text.replace(/\d\.\d{3}/, "9.999"));
    const { status, stderr } = await exported("series", RUN, "-o", at("no.csv"));
    writeFileSync(table, text);
    expect([status, stderr]).toEqual([2, expect.stringContaining("was changed since")]);
  });
});
