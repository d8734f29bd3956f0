import { type ParquetColumn, writeParquet } from "@rainreckon/formats";
import { counted } from "../ui/numbers.ts";
import { type FinishedRun, numberOf, tableOf } from "./finished-run.ts";
import type { ExportReport } from "./schema.ts";
import { writeTarget } from "./target.ts";

/** Columns of pairs.csv that hold no numbers; all others do. */
const TEXTS = new Set(["network", "gauge_id", "radar_id", "reason"]);
const INSTANTS = new Set(["start", "end"]);

/** Writes pairs.csv as Parquet, with its columns under the same names. */
export async function exportPairs(
  run: FinishedRun,
  { file, replace }: { readonly file: string; readonly replace: boolean },
): Promise<ExportReport> {
  const rows = await tableOf(run, "pairs.csv");
  const columns = Object.keys(rows[0] ?? {}).map((name) => columnOf(name, rows));
  await writeTarget(file, { run: run.folder, replace }, (draft) => writeParquet(draft, columns));
  return {
    format: "rainreckon-export-1",
    run: run.folder,
    kind: "pairs",
    files: [file],
    rows: rows.length,
    missing: 0,
    says: [
      `${counted(rows.length, "pair")} with the columns of pairs.csv; instants are timestamps in UTC, missing is null`,
    ],
  };
}

function columnOf(name: string, rows: readonly Record<string, string>[]): ParquetColumn {
  const cells = rows.map((row) => row[name] ?? "");
  if (name === "used") return { name, kind: "flag", values: cells.map((cell) => cell === "yes") };
  if (INSTANTS.has(name)) return { name, kind: "instant", values: cells.map((cell) => Date.parse(cell)) };
  if (TEXTS.has(name)) return { name, kind: "text", values: cells.map((cell) => cell || undefined) };
  return { name, kind: "number", values: Float64Array.from(cells, numberOf) };
}
