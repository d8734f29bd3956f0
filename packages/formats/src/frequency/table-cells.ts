import { InputError } from "@rainreckon/core";
import { decimalOf, whyNoNumber } from "../gauges/decimal.ts";
import { readHeadText, streamRows } from "../gauges/delimited.ts";
import { displayText } from "../gauges/display-text.ts";

/** Most rows of one table of depths or factors. */
const MAX_ROWS = 20_000;
const MAX_ABOVE = 50;
/** "# series: PDS", "source = Some Institute": what stands above the header. */
const REMARK = /^#?\s*"?([a-z][a-z_ ]*?)"?\s*[:=,;]\s*"?(.*?)"?[\s,;]*$/i;

/** A row of a small table, with its line. */
export interface TableRow {
  readonly line: number;
  /** Cells by the header's names, in lower case. */
  readonly cells: ReadonlyMap<string, string>;
}

/** A small table as it stands: lines above its header, names of its columns, rows. */
export interface SmallTable {
  /** By lower-case key: value and line. */
  readonly remarks: ReadonlyMap<string, { readonly value: string; readonly line: number }>;
  readonly headerLine: number;
  readonly columns: readonly string[];
  readonly rows: readonly TableRow[];
}

/**
 * Reads a small CSV table whose header may have lines like "# series: PDS" above it.
 *
 * @param leading - name of a column by which the header is known
 * @throws InputError with file and line where there is no such header, or a row cannot be read
 */
export async function readSmallTable(path: string, leading: string): Promise<SmallTable> {
  const head = (await readHeadText(path)).split(/\r?\n/, MAX_ABOVE + 1);
  const at = head.findIndex((line) => cellsOf(line).includes(leading));
  if (at < 0) {
    throw new InputError(
      `there is no column ${leading}`,
      path,
      `write a header line with the column ${leading} within the first ${MAX_ABOVE} lines`,
    );
  }
  const remarks = new Map<string, { value: string; line: number }>();
  for (const [k, text] of head.slice(0, at).entries()) {
    const match = REMARK.exec(text.replace(/^\uFEFF/, "").trim());
    if (match !== null) remarks.set(keyOf(match[1]), { value: displayText(match[2].trim()), line: k + 1 });
  }
  const rows: TableRow[] = [];
  let columns: string[] = [];
  await streamRows(
    path,
    { headerLine: at + 1 },
    {
      header: (cells, line) => {
        columns = cells.map(keyOf);
        const twice = columns.find((name, k) => name !== "" && columns.indexOf(name) !== k);
        if (twice !== undefined)
          throw new InputError(`two columns are named "${twice}"`, `${path}, line ${line}`, "name each once");
      },
      row: (cells, line) => {
        if (cells[0].startsWith("#")) return;
        if (rows.length >= MAX_ROWS)
          throw new InputError(`there are more than ${MAX_ROWS} rows`, path, "give a smaller table");
        rows.push({ line, cells: new Map(columns.map((name, k) => [name, cells[k] ?? ""])) });
      },
      quoteFault: (line) => {
        throw new InputError("a quotation mark is not closed", `${path}, line ${line}`, "close it");
      },
      undecoded: (line, encoding) => {
        throw new InputError(
          `the row holds a character that is not ${encoding}`,
          `${path}, line ${line}`,
          "write the table in UTF-8",
        );
      },
    },
  );
  if (rows.length === 0)
    throw new InputError("the table has no rows", path, "write one row below the header for each entry");
  return { remarks, headerLine: at + 1, columns, rows };
}

/**
 * A number above 0 of a row.
 *
 * @throws InputError with file, line and column where it is none; NaN for an empty cell that may be empty
 */
export function positiveOf(path: string, row: TableRow, column: string, mayBeEmpty = false): number {
  const cell = row.cells.get(column) ?? "";
  if (cell === "" && mayBeEmpty) return Number.NaN;
  const number = decimalOf(cell);
  if (number > 0 && number < 1e9) return number;
  const why =
    cell === ""
      ? "is empty"
      : Number.isNaN(number)
        ? `"${displayText(cell, 40)}" ${whyNoNumber(cell)}`
        : `"${displayText(cell, 40)}" is not above 0`;
  const units = /[a-z"″]/i.test(cell)
    ? "write the number alone: the unit stands in the column's name"
    : "write a number above 0, with a decimal point";
  throw new InputError(`${column} ${why}`, `${path}, line ${row.line}`, units);
}

/** What a table says once: in the lines above its header, or in a column with the same word in each row. */
export function saidOnce(
  path: string,
  table: SmallTable,
  key: string,
): { readonly value: string; readonly line: number } | undefined {
  const above = table.remarks.get(key);
  if (!table.columns.includes(key)) return above;
  let first = above;
  for (const row of table.rows) {
    const value = displayText(row.cells.get(key) ?? "");
    if (value === "") continue;
    if (first !== undefined && first.value.toLowerCase() !== value.toLowerCase()) {
      throw new InputError(
        `${key} is "${value}" here and "${first.value}" in line ${first.line}`,
        `${path}, line ${row.line}`,
        "give each its own table",
      );
    }
    first ??= { value, line: row.line };
  }
  return first;
}

function cellsOf(line: string): string[] {
  return line
    .replace(/^\uFEFF/, "")
    .split(/[,;\t|]/)
    .map((cell) => keyOf(cell.trim().replace(/^"(.*)"$/, "$1")));
}

function keyOf(text: string): string {
  return text.trim().toLowerCase().replaceAll(/\s+/g, "_");
}
