import { withoutControlCharacters, writeText } from "./text.ts";

/** A column of words: names, ids, reasons, instants. Missing is `undefined` or empty. */
export interface CsvTextColumn<Row> {
  readonly name: string;
  readonly kind: "text";
  readonly of: (row: Row) => string | undefined;
}

/** A column of numbers, all with the same number of decimals. Missing is `undefined` or NaN. */
export interface CsvNumberColumn<Row> {
  readonly name: string;
  readonly kind: "number";
  /** Digits after the point, 0 to 15. */
  readonly decimals: number;
  readonly of: (row: Row) => number | undefined;
  /** What stands for a missing number, for a reader that takes no empty cell; empty where left out. */
  readonly missing?: string;
}

export type CsvColumn<Row> = CsvTextColumn<Row> | CsvNumberColumn<Row>;

/**
 * Write a table as CSV: RFC 4180 with LF, UTF-8, one header line and no comment lines.
 *
 * - Missing is an empty cell or the column's own code, never 0.
 * - Numbers have their column's decimals, no exponent and no "-0".
 * - Text loses its control characters, and text that a spreadsheet would take for a formula gets
 *   an apostrophe in front; numbers never do.
 *
 * Rows are pulled one at a time. On failure the file is left incomplete: whoever chose the path removes it.
 *
 * @param path - exactly where to write
 * @param columns - in the order they are written; names must differ
 * @param rows - may be read from elsewhere while they are written
 * @throws InputError when the file cannot be written; RangeError for two columns of one name, decimals
 *   outside 0 to 15, and a number that is infinite or from 1e21 on
 * @remarks Formula guard: OWASP, "CSV Injection" (from memory), whose list of leading characters this covers.
 */
export async function writeCsv<Row>(
  path: string,
  columns: readonly CsvColumn<Row>[],
  rows: Iterable<Row> | AsyncIterable<Row>,
): Promise<void> {
  checkColumns(columns);
  await writeText(path, csvLines(columns, rows));
}

/** The same table as one text, for a table that goes to no file. @throws RangeError as {@link writeCsv} */
export async function csvText<Row>(
  columns: readonly CsvColumn<Row>[],
  rows: Iterable<Row> | AsyncIterable<Row>,
): Promise<string> {
  checkColumns(columns);
  let text = "";
  for await (const line of csvLines(columns, rows)) text += line;
  return text;
}

async function* csvLines<Row>(
  columns: readonly CsvColumn<Row>[],
  rows: Iterable<Row> | AsyncIterable<Row>,
): AsyncGenerator<string> {
  yield `${columns.map((column) => textCell(column.name)).join(",")}\n`;
  for await (const row of rows) {
    const cells = columns.map((column) =>
      column.kind === "number" ? numberCell(column.of(row), column) : textCell(column.of(row)),
    );
    // A line of one empty cell would read as a blank line, so it is quoted.
    yield `${cells.length === 1 && cells[0] === "" ? '""' : cells.join(",")}\n`;
  }
}

function checkColumns(
  columns: readonly { name: string; kind: string; decimals?: number; missing?: string }[],
): void {
  const names = new Set<string>();
  for (const { name, kind, decimals, missing = "" } of columns) {
    if (names.has(name)) throw new RangeError(`two columns are named ${name}`);
    names.add(name);
    if (kind === "number" && !(Number.isInteger(decimals) && decimals! >= 0 && decimals! <= 15)) {
      throw new RangeError(`column ${name} needs 0 to 15 decimals, got ${decimals}`);
    }
    // A code that reads as a depth would be one; only a sign, letters and digits make a cell of its own.
    if (Number(missing) >= 0 && missing !== "") throw new RangeError(`${missing} is no code for missing`);
    if (!/^-?[\w.]*$/.test(missing)) throw new RangeError(`${missing} is no code for missing`);
  }
}

function numberCell(
  value: number | undefined,
  column: { name: string; decimals: number; missing?: string },
): string {
  if (value === undefined || Number.isNaN(value)) return column.missing ?? "";
  if (!(Math.abs(value) < 1e21)) {
    throw new RangeError(`column ${column.name} cannot hold ${value}: leave it missing and give the reason`);
  }
  const digits = value.toFixed(column.decimals);
  return /^-[0.]+$/.test(digits) ? digits.slice(1) : digits;
}

/** Also the full-width forms, which some spreadsheets read as the plain ones, and after blanks, which some skip. */
const FORMULA_START = /^\s*[=+\-@\uff1d\uff0b\uff0d\uff20]/;

function textCell(value: string | undefined): string {
  if (value === undefined) return "";
  const clean = withoutControlCharacters(value);
  // A tab or a carriage return in front is itself a known trick: what follows it is guarded whatever it is.
  const guarded = FORMULA_START.test(clean) || /^[\t\r]/.test(value) ? `'${clean}` : clean;
  return /[",]/.test(guarded) || guarded !== guarded.trim() ? `"${guarded.replaceAll('"', '""')}"` : guarded;
}
