import { readFile } from "node:fs/promises";
import { join } from "node:path";
import { asyncBufferFromFile, parquetMetadataAsync, parquetReadObjects } from "hyparquet";
import { expect, test, vi } from "vitest";
import { FULL_DEVICE, scratchFolder } from "../../test/foreign-tools.ts";
import { type ParquetColumn, writeParquet } from "./parquet.ts";

const folder = scratchFolder();
const NOON = Date.UTC(2031, 4, 20, 12);

const TABLE: readonly ParquetColumn[] = [
  { name: "gauge_id", kind: "text", values: ["007", "NO", undefined, "Île\nnorth"] },
  { name: "end", kind: "instant", values: [NOON, NOON + 3_600_000, Number.NaN, NOON] },
  { name: "gauge_mm", kind: "number", values: Float64Array.of(0, 12.345, Number.NaN, 1e-9) },
  { name: "used", kind: "flag", values: [true, false, undefined, true] },
];

// hyparquet: a reader that is not ours.
test("every value comes back through another reader, and missing is null, never 0", async () => {
  const path = join(folder, "table.parquet");
  await writeParquet(path, TABLE);
  const file = await asyncBufferFromFile(path);
  expect(await parquetReadObjects({ file })).toEqual([
    { gauge_id: "007", end: new Date(NOON), gauge_mm: 0, used: true },
    { gauge_id: "NO", end: new Date(NOON + 3_600_000), gauge_mm: 12.345, used: false },
    { gauge_id: null, end: null, gauge_mm: null, used: null },
    { gauge_id: "Île north", end: new Date(NOON), gauge_mm: 1e-9, used: true },
  ]);
  const { schema } = await parquetMetadataAsync(file);
  expect(schema.slice(1).map(({ name, type, repetition_type }) => [name, type, repetition_type])).toEqual([
    ["gauge_id", "BYTE_ARRAY", "OPTIONAL"],
    ["end", "INT64", "OPTIONAL"],
    ["gauge_mm", "DOUBLE", "OPTIONAL"],
    ["used", "BOOLEAN", "OPTIONAL"],
  ]);
});

test("an empty table keeps its columns", async () => {
  const path = join(folder, "empty.parquet");
  await writeParquet(
    path,
    TABLE.map((column) => ({ ...column, values: [] })),
  );
  const file = await asyncBufferFromFile(path);
  expect(await parquetReadObjects({ file })).toEqual([]);
  expect((await parquetMetadataAsync(file)).schema.slice(1).map(({ name }) => name)).toEqual(
    TABLE.map(({ name }) => name),
  );
});

test("the same table gives the same bytes at another time", async () => {
  const bytes = async (name: string) => {
    await writeParquet(join(folder, name), TABLE);
    return readFile(join(folder, name));
  };
  const first = await bytes("first.parquet");
  const clock = vi.spyOn(Date, "now").mockReturnValue(2e12);
  const second = await bytes("second.parquet");
  clock.mockRestore();
  expect(second.equals(first)).toBe(true);
});

test("columns of different lengths are the caller's mistake", async () => {
  const uneven: ParquetColumn[] = [...TABLE, { name: "more", kind: "number", values: [1] }];
  await expect(writeParquet(join(folder, "x.parquet"), uneven)).rejects.toThrow(RangeError);
});

test.skipIf(!FULL_DEVICE)(
  "a full disk is a failure midway (skipped where there is no /dev/full)",
  async () => {
    await expect(writeParquet("/dev/full", TABLE)).rejects.toMatchObject({
      kind: "midway",
      where: "/dev/full",
    });
  },
);
