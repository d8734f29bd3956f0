import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { InputError } from "@rainreckon/core";
import { afterAll, expect, test } from "vitest";
import { readArealReduction } from "./areal-reduction.ts";
import { readFrequencyTable } from "./frequency-table.ts";

const folder = mkdtempSync(path.join(tmpdir(), "rainreckon-frequency-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));
let written = 0;
function fileOf(lines: readonly string[]): string {
  const file = path.join(folder, `table-${written++}.csv`);
  writeFileSync(file, `${lines.join("\n")}\n`);
  return file;
}

const HEADER = "duration_min,return_period_years,depth_mm";
const ROWS = ["10,2,8.2", "10,10,13.9", "60,2,15.1", "60,10,25.9"];

test("a table as an authority writes it: lines above the header, any order of rows, CRLF, a mark of the encoding", async () => {
  const file = path.join(folder, "whole.csv");
  const lines = ["\uFEFF# series: PDS", "# kind: point", "source; Invented Institute", "# edition: 2030"];
  writeFileSync(file, [...lines, HEADER, ...[...ROWS].reverse()].join("\r\n"));
  expect(await readFrequencyTable(file)).toEqual({
    series: "PDS",
    kind: "point",
    source: "Invented Institute",
    edition: "2030",
    durationsMin: [10, 60],
    periodsYears: [2, 10],
    depthMm: [
      [8.2, 13.9],
      [15.1, 25.9],
    ],
  });
});

test("columns may say it in each row; low and high come along; inches are 25.4 mm", async () => {
  const table = await readFrequencyTable(
    fileOf([
      "duration_min;return_period_years;depth_in;low;high;series;kind;area_km2",
      "60;2;1;0.9;1.2;ams;areal;25",
      "60;10;2;1.5;2.6;AMS;areal;25",
    ]),
  );
  expect(table).toMatchObject({
    series: "AMS",
    kind: "areal",
    areaKm2: 25,
    depthMm: [[25.4, 50.8]],
    highMm: [[1.2 * 25.4, 2.6 * 25.4]],
  });
  expect(table.lowMm?.[0][1]).toBeCloseTo(38.1, 9);
});

test("what the table does not say is not known, and never guessed", async () => {
  expect(await readFrequencyTable(fileOf([HEADER, ...ROWS]))).toMatchObject({
    series: "unknown",
    kind: "unknown",
    source: "",
    edition: "",
  });
});

test.each([
  ["a gap", [HEADER, "10,2,8.2", "10,10,13.9", "60,2,15.1"], 4, /no depth for 60 min and 10 years/],
  ["twice", [HEADER, ...ROWS, "60,10,26"], 6, /stand in line 5 already/],
  ["not rising", [HEADER, "10,2,8.2", "10,10,8.2"], 3, /no larger than that of 2 years \(line 2\)/],
  ["falling with duration", [HEADER, "10,2,8.2", "60,2,8.1"], 3, /less than that of 10 min \(line 2\)/],
  ["a unit in a cell", [HEADER, "10,2,8.2 mm"], 2, /"8.2 mm" is no number/],
  ["a decimal comma", ["duration_min;return_period_years;depth_mm", "10;2;8,2"], 2, /decimal comma/],
  ["an empty cell", [HEADER, "10,2,"], 2, /depth_mm is empty/],
  ["a depth of nothing", [HEADER, "10,2,0"], 2, /"0" is not above 0/],
  ["a word", [HEADER, "10,two,8"], 2, /return_period_years "two" is no number/],
  ["two units", ["duration_min,return_period_years,depth_mm,low_in", "10,2,8,7"], 1, /two units/],
  ["another unit said", [HEADER, ...ROWS].toSpliced(0, 0, "# unit: in"), 1, /the unit is "in"/],
  [
    "units that change",
    [`${HEADER},unit`, "10,2,8.2,mm", "10,10,0.5,in"],
    3,
    /unit is "in" here and "mm" in line 2/,
  ],
  ["series that change", [`${HEADER},series`, "10,2,8.2,AMS", "10,10,9,PDS"], 3, /series is "PDS" here/],
  ["a word for series", ["# series: POT", HEADER, ...ROWS], 1, /series is "POT"/],
  ["one year of maxima", [HEADER, "10,1,6", "10,2,8"], 2, /does not exist in annual maxima/],
  ["low above", [`${HEADER},low,high`, "10,2,8,9,10"], 2, /outside its own low and high/],
  ["no periods", ["duration_min,depth_mm", "10,8"], 1, /no column return_period_years/],
  ["no depths", ["duration_min,return_period_years", "10,2"], 1, /no column depth_mm or depth_in/],
  [
    "one name twice",
    ["duration_min,return_period_years,depth_mm,depth_mm", "10,2,8,9"],
    1,
    /two columns are named/,
  ],
] as const)("%s is refused with its line", async (_what, lines, line, message) => {
  const file = fileOf(lines);
  const error = await readFrequencyTable(file).catch((cause: unknown) => cause);
  expect(error).toBeInstanceOf(InputError);
  expect((error as InputError).what).toMatch(message);
  expect((error as InputError).where).toBe(`${file}, line ${line}`);
});

test.each([
  ["no header", ["a,b", "1,2"], /no column duration_min/],
  ["no rows", [HEADER], /no rows/],
])("%s is refused", async (_what, lines, message) => {
  await expect(readFrequencyTable(fileOf(lines))).rejects.toThrow(message);
});

test("areal reductions are shares, and whole", async () => {
  const header = "duration_min,area_km2,factor";
  expect(
    await readArealReduction(fileOf(["# source: Invented", header, "60,10,0.95", "60,100,0.8"])),
  ).toEqual({ source: "Invented", durationsMin: [60], areasKm2: [10, 100], factor: [[0.95, 0.8]] });
  await expect(readArealReduction(fileOf([header, "60,10,95"]))).rejects.toThrow(/above 1/);
  await expect(readArealReduction(fileOf([header, "60,10,0.9", "30,20,0.9"]))).rejects.toThrow(
    /no factor for 30 min and 10/,
  );
  await expect(readArealReduction(fileOf([header, "60,10,0.9", "60,10,0.8"]))).rejects.toThrow(
    /stand in line 2/,
  );
  await expect(readArealReduction(fileOf(["duration_min,factor", "60,0.9"]))).rejects.toThrow(
    /no column area_km2/,
  );
});

test("a spoilt table ends in one clear fault, never in another error", async () => {
  const text = ["# series: AMS", HEADER, ...ROWS].join("\n");
  let state = 4711;
  for (let turn = 0; turn < 300; turn++) {
    state = (state * 16_807) % 2_147_483_647;
    const at = state % text.length;
    const spoilt = `${text.slice(0, at)}${String.fromCharCode(9 + (state % 118))}${text.slice(at + 1)}`;
    const outcome = await readFrequencyTable(fileOf([spoilt])).catch((cause: unknown) => cause);
    if (outcome instanceof Error) expect(outcome).toBeInstanceOf(InputError);
  }
});
