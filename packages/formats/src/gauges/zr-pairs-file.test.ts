import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import type { Notice } from "@rainreckon/core";
import { afterAll, expect, test } from "vitest";
import { readZrPairs } from "./zr-pairs-file.ts";

const folder = mkdtempSync(path.join(tmpdir(), "zr-pairs-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

async function read(text: string | Uint8Array) {
  const file = path.join(folder, "pairs.csv");
  writeFileSync(file, text);
  const notices: Notice[] = [];
  return { table: await readZrPairs(file, (notice) => notices.push(notice)), notices };
}

test("dBZ and rates, in any order of columns, with others between them", async () => {
  const { table, notices } = await read(
    "site;rain_rate_mm_per_h;x;reflectivity_dbz\na;1.5;9;23.0103\nb;0;9;-31.5\n",
  );
  expect([...table.dbz]).toEqual([23.0103, -31.5]);
  expect([...table.rateMmPerHour]).toEqual([1.5, 0]);
  expect([table.gauges, table.endEpochMs, table.rowsLeftOut, notices]).toEqual([undefined, undefined, 0, []]);
});

test("Z in mm6 m-3: 200 is 23.0103 dBZ, 0 is observed without echo", async () => {
  const { table } = await read("z_mm6_per_m3,rain_rate_mm_per_h\n200,1\n0,0\n");
  expect(table.dbz[0]).toBeCloseTo(23.0103, 4);
  expect(table.dbz[1]).toBe(Number.NEGATIVE_INFINITY);
});

test("gauges and ends", async () => {
  const { table } = await read(
    "reflectivity_dbz,rain_rate_mm_per_h,gauge,end\n20,1,007,2031-05-20T12:00Z\n20,1,NO,2031-05-20T14:00+02:00\n",
  );
  expect(table.gauges).toEqual(["007", "NO"]);
  expect([...table.endEpochMs!]).toEqual([Date.UTC(2031, 4, 20, 12), Date.UTC(2031, 4, 20, 12)]);
});

test.each([
  ["no number", "twenty,1", /reflectivity_dbz.*"twenty" is no number/],
  ["a formula", "=1+1,1", /is no number/],
  ["an empty cell", ",1", /is no number/],
  ["a short row", "20", /rain_rate_mm_per_h/],
  ["infinite", "Infinity,1", /is no number/],
  ["beyond any radar", "140,1", /-60 to 100 dBZ/],
  ["negative rain", "20,-1", /0 to 3000 mm\/h/],
  ["a mark of missing values", "-9999,1", /-60 to 100 dBZ/],
  ["rain beyond any record", "20,99999", /0 to 3000/],
])("%s: the row is left out and told by line", async (_, row, message) => {
  const { table, notices } = await read(`reflectivity_dbz,rain_rate_mm_per_h\n20,1\n${row}\n30,3\n`);
  expect([...table.dbz]).toEqual([20, 30]);
  expect(table.rowsLeftOut).toBe(1);
  expect(notices).toHaveLength(1);
  expect(notices[0]!.what).toMatch(message);
  expect(notices[0]!.where).toMatch(/line 3$/);
});

test("a control character in a cell does not reach the terminal, and many faults are counted", async () => {
  const bad = Array.from({ length: 15 }, () => "\u001b[31mred,1").join("\n");
  const { table, notices } = await read(`reflectivity_dbz,rain_rate_mm_per_h\n${bad}\n20,1\n`);
  expect(table.rowsLeftOut).toBe(15);
  expect(notices).toHaveLength(11);
  expect(notices[10]!.what).toMatch(/^5 more/);
  expect(JSON.stringify(notices)).not.toContain("\\u001b");
});

test.each([
  ["no rate", "reflectivity_dbz,rain\n20,1\n", /no column "rain_rate_mm_per_h"/],
  ["no reflectivity", "dbz,rain_rate_mm_per_h\n20,1\n", /no column "reflectivity_dbz" or "z_mm6_per_m3"/],
  ["both", "reflectivity_dbz,z_mm6_per_m3,rain_rate_mm_per_h\n20,100,1\n", /both as dBZ and as Z/],
  ["one twice", "reflectivity_dbz,reflectivity_dbz,rain_rate_mm_per_h\n20,20,1\n", /there twice/],
  ["no row", "reflectivity_dbz,rain_rate_mm_per_h\n", /no pair is left/],
  ["nothing", "", /empty/],
  ["one column", "reflectivity_dbz\n20\n", /only one column/],
])("%s: refused", async (_, text, message) => {
  await expect(read(text)).rejects.toThrow(message);
});
