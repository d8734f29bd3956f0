import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { writeCsv } from "@rainreckon/formats";
import { expect, test } from "vitest";
import { ownCsvRows, ownCsvStream } from "./own-csv.ts";

test("reads what the writer writes, cell for cell", async () => {
  const folder = mkdtempSync(path.join(tmpdir(), "rainreckon-csv-"));
  const file = path.join(folder, "table.csv");
  const rows = [
    { id: "007", name: 'Brook, "the old"', depthMm: 1.25 },
    { id: "NO", name: " spaced ", depthMm: Number.NaN },
    { id: "=1+1", name: "", depthMm: 0 },
  ];
  await writeCsv(
    file,
    [
      { name: "id", kind: "text", of: (row) => row.id },
      { name: "name", kind: "text", of: (row) => row.name },
      { name: "depth_mm", kind: "number", decimals: 2, of: (row) => row.depthMm },
    ],
    rows,
  );
  const text = readFileSync(file, "utf8");
  // By hand, after RFC 4180; the apostrophe is the writer's guard against spreadsheet formulas.
  expect(ownCsvRows(text)).toEqual([
    { id: "007", name: 'Brook, "the old"', depth_mm: "1.25" },
    { id: "NO", name: " spaced ", depth_mm: "" },
    { id: "'=1+1", name: "", depth_mm: "0.00" },
  ]);
  rmSync(folder, { recursive: true });
});

test("line by line the same rows come, an empty last cell among them", async () => {
  const text = 'id,name,share\n"a,1","say ""so""",\nb,,0.5\n';
  async function* lines() {
    yield* text.trimEnd().split("\n");
  }
  const rows: Record<string, string>[] = [];
  for await (const row of ownCsvStream(lines())) rows.push(row);
  expect(rows).toEqual(ownCsvRows(text));
  expect(rows).toEqual([
    { id: "a,1", name: 'say "so"', share: "" },
    { id: "b", name: "", share: "0.5" },
  ]);
});
