import { readFile } from "node:fs/promises";
import { join } from "node:path";
import Papa from "papaparse";
import { expect, test } from "vitest";
import { FOREIGN_TOOLS, FULL_DEVICE, outputOf, scratchFolder } from "../../test/foreign-tools.ts";
import { type CsvColumn, csvText, writeCsv } from "./csv.ts";

const folder = scratchFolder();

interface Row {
  readonly id?: string;
  readonly depthMm?: number;
}

const COLUMNS: readonly CsvColumn<Row>[] = [
  { name: "gauge_id", kind: "text", of: (row) => row.id },
  { name: "depth_mm", kind: "number", decimals: 2, of: (row) => row.depthMm },
];

async function written(rows: readonly Row[]): Promise<string> {
  const path = join(folder, "table.csv");
  await writeCsv(path, COLUMNS, rows);
  return readFile(path, "utf8");
}

test("a header, then a line a row, with LF at the end of each", async () => {
  expect(await written([{ id: "0042", depthMm: 1.5 }])).toBe("gauge_id,depth_mm\n0042,1.50\n");
});

test("a table that goes to no file is the same text", async () => {
  const rows = [{ id: "=1+1", depthMm: 1.5 }, {}];
  expect(await csvText(COLUMNS, rows)).toBe(await written(rows));
});

test("missing is empty, and never 0", async () => {
  expect(await written([{}, { id: "", depthMm: Number.NaN }, { id: "a", depthMm: 0 }])).toBe(
    "gauge_id,depth_mm\n,\n,\na,0.00\n",
  );
});

test.each([
  [-0, "0.00"],
  [-0.001, "0.00"],
  [-0.006, "-0.01"],
  [1e-7, "0.00"],
  [123456789012.25, "123456789012.25"],
])("%d is written %s: no exponent, no minus zero", async (depthMm, expected) => {
  expect(await written([{ depthMm }])).toBe(`gauge_id,depth_mm\n,${expected}\n`);
});

test.each([Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY, 1e21])("%d is refused", async (depthMm) => {
  await expect(written([{ depthMm }])).rejects.toThrow(/depth_mm/);
});

// The characters that OWASP, "CSV Injection" (from memory), lists as starting a formula.
test.each([
  ["=HYPERLINK(1)", "'=HYPERLINK(1)"],
  ["+1", "'+1"],
  ["-12", "'-12"],
  ["@SUM(A1)", "'@SUM(A1)"],
  ["\t=1", "' =1"],
  ["\rx", "' x"],
  [" =1", "' =1"],
  ["\u0000=1", "'=1"],
  ["\uff1d1", "'\uff1d1"],
  ["NO", "NO"],
  ["a=b", "a=b"],
  ["12:30", "12:30"],
])("text %j can be no formula", async (id, expected) => {
  expect(await written([{ id, depthMm: -3 }])).toBe(`gauge_id,depth_mm\n${expected},-3.00\n`);
});

const AWKWARD = ['says "dry"', "a,b", "line\nbreak", " blank ", "ünïcode 雨", "'", '"', "<b>&amp;"];

test("text with commas and quotes comes back whole through another reader (papaparse)", async () => {
  const text = await written(AWKWARD.map((id) => ({ id, depthMm: 1 })));
  const { data, errors } = Papa.parse<string[]>(text, { skipEmptyLines: true });
  expect(errors).toEqual([]);
  expect(data.slice(1).map(([id]) => id)).toEqual(AWKWARD.map((id) => id.replace("\n", " ")));
});

test.skipIf(!FOREIGN_TOOLS)("and through Python's csv module (RAINRECKON_FOREIGN_TOOLS=1)", async () => {
  await written(AWKWARD.map((id) => ({ id, depthMm: 1 })));
  const script =
    "import csv,json,sys; print(json.dumps(list(csv.reader(open(sys.argv[1], newline='', encoding='utf-8'), strict=True))))";
  const rows: string[][] = JSON.parse(
    outputOf("/usr/bin/python3", ["-c", script, join(folder, "table.csv")]),
  );
  expect(rows.slice(1)).toEqual(AWKWARD.map((id) => [id.replace("\n", " "), "1.00"]));
});

test("a table of one column keeps its empty rows apart from blank lines", async () => {
  const path = join(folder, "one.csv");
  await writeCsv(path, [COLUMNS[0]], [{ id: "a" }, {}]);
  expect(await readFile(path, "utf8")).toBe('gauge_id\na\n""\n');
});

test("rows may arrive one by one from elsewhere", async () => {
  const path = join(folder, "async.csv");
  const rows = async function* () {
    for (let row = 0; row < 3; row++) yield { id: `g${row}`, depthMm: row };
  };
  await writeCsv(path, COLUMNS, rows());
  expect((await readFile(path, "utf8")).split("\n")).toHaveLength(5);
});

test("two columns of one name, or too many decimals, are the caller's mistake", async () => {
  const path = join(folder, "never.csv");
  await expect(writeCsv(path, [COLUMNS[0], COLUMNS[0]], [])).rejects.toBeInstanceOf(RangeError);
  const column: CsvColumn<Row> = { name: "x", kind: "number", decimals: 16, of: () => 1 };
  await expect(writeCsv(path, [column], [])).rejects.toBeInstanceOf(RangeError);
});

test.skipIf(!FULL_DEVICE)(
  "a full disk is a failure midway (skipped where there is no /dev/full)",
  async () => {
    await expect(writeCsv("/dev/full", COLUMNS, [{ id: "a" }])).rejects.toMatchObject({ kind: "midway" });
  },
);

test("a column may have a code for missing, which is no depth and no formula", async () => {
  const column = (missing: string) => ({
    kind: "number" as const,
    name: "depth_mm",
    decimals: 1,
    missing,
    of: (value: number) => value,
  });
  expect(await csvText([column("-999")], [0, Number.NaN, 1.25])).toBe("depth_mm\n0.0\n-999\n1.3\n");
  expect(await csvText([column("NaN")], [Number.NaN])).toBe("depth_mm\nNaN\n");
  for (const code of ["0", "0.0", "7", "=1+1", "a,b", '"'])
    await expect(csvText([column(code)], [1])).rejects.toThrow(RangeError);
});
