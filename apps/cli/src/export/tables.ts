import path from "node:path";
import { type CsvColumn, writeCsv } from "@rainreckon/formats";
import { counted } from "../ui/numbers.ts";
import { type FinishedRun, numberOf, tableOf } from "./finished-run.ts";
import type { ExportReport } from "./schema.ts";
import { targetFolder, writeTarget } from "./target.ts";

const MM_PER_INCH = 25.4;
/** A thousandth of a millimetre is 0.00004 in. */
const INCH_DECIMALS = 5;

/**
 * Writes the tables of a run with depths in inches: a column that ends in `_mm` ends in `_in`, and all else stays.
 * Sentences in the columns reason and evidence keep their millimetres.
 */
export async function exportTables(
  run: FinishedRun,
  { folder, replace }: { readonly folder: string; readonly replace: boolean },
): Promise<ExportReport> {
  const names = run.done.manifest.outputs.map(({ file }) => file).filter((file) => file.endsWith(".csv"));
  const into = targetFolder(folder, run.folder);
  const files: string[] = [];
  let count = 0;
  for (const name of names) {
    const rows = await tableOf(run, name);
    const file = path.join(into, path.basename(name));
    const columns = Object.keys(rows[0] ?? {}).map((column) => columnInInches(column, rows));
    await writeTarget(file, { run: run.folder, replace }, (draft) => writeCsv(draft, columns, rows));
    files.push(file);
    count += rows.length;
  }
  return {
    format: "rainreckon-export-1",
    run: run.folder,
    kind: "tables",
    files,
    rows: count,
    missing: 0,
    says: [
      `${counted(files.length, "table")} with depths in inches: columns that ended in _mm end in _in`,
      "sentences (reason, evidence) keep their millimetres; NetCDF and GeoTIFF of the run stay in mm",
    ],
  };
}

/** The columns of our tables that hold numbers say so by their unit. */
const NUMBERS = /_(mm|db|fraction|share|km2?|m3?|h)$/;

function columnInInches(
  name: string,
  rows: readonly Record<string, string>[],
): CsvColumn<Record<string, string>> {
  if (!NUMBERS.test(name)) return { kind: "text", name, of: (row) => unguarded(row[name]) };
  if (!name.endsWith("_mm"))
    return { kind: "number", name, decimals: decimalsOf(name, rows), of: (row) => numberOf(row[name]) };
  return {
    kind: "number",
    name: name.replace(/_mm$/, "_in"),
    decimals: INCH_DECIMALS,
    of: (row) => numberOf(row[name]) / MM_PER_INCH,
  };
}

/** Every number of a column has the same decimals, so the first one tells. */
function decimalsOf(name: string, rows: readonly Record<string, string>[]): number {
  const first = rows.find((row) => row[name])?.[name] ?? "";
  return first.split(".")[1]?.length ?? 0;
}

/** Without the guard against formulas, which is set anew where it is needed. */
function unguarded(cell: string | undefined): string | undefined {
  return cell?.replace(/^'(?=\s*[=+\-@\uff1d\uff0b\uff0d\uff20])/, "");
}
