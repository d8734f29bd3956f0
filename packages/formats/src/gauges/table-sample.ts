import { belowOf, type DecimalMark, decimalOf, hasDecimalComma } from "./decimal.ts";
import { DEFAULT_TRACE } from "./gauge-file-spec.ts";

/** A table as the guesses see it: a header and the rows of both ends of the file, cells trimmed. */
export interface TableSample {
  readonly columns: readonly string[];
  readonly rows: readonly (readonly string[])[];
  /** How many of `rows` come from the head; the others are from the tail. */
  readonly headRows: number;
  /** Whether `rows` are all there are. */
  readonly whole: boolean;
  /** Column of stamps; -1 where there is none. */
  readonly timeAt: number;
  /** Column of dates beside one of times of day. */
  readonly dateAt?: number;
  readonly decimal: DecimalMark;
}

/** Share of a column's filled cells that must look alike for the column to be of that kind. */
export const MOST = 0.8;

/** Share of the filled cells of a column that pass; 0 where none is filled. */
export function share(
  rows: readonly (readonly string[])[],
  at: number,
  passes: (cell: string) => boolean,
): number {
  const filled = rows.map((row) => row[at] ?? "").filter((cell) => cell !== "");
  return filled.length === 0 ? 0 : filled.filter(passes).length / filled.length;
}

/** Whether nearly all filled cells of a column are numbers, or say in letters that there is none. */
export function isNumeric({ rows, decimal }: Pick<TableSample, "rows" | "decimal">, at: number): boolean {
  const isNumber = (cell: string) => !Number.isNaN(decimalOf(cell, decimal));
  const standsForNumber = (cell: string) =>
    !Number.isNaN(belowOf(cell, decimal)) || DEFAULT_TRACE.includes(cell) || isMissingWord(cell);
  return (
    share(rows, at, isNumber) > 0 &&
    share(rows, at, (cell) => isNumber(cell) || standsForNumber(cell)) >= MOST
  );
}

/** The decimal mark of a table: a comma where more cells are numbers only with one than have a decimal point. */
export function guessDecimal(rows: readonly (readonly string[])[]): DecimalMark {
  let commas = 0;
  let points = 0;
  for (const row of rows) {
    for (const cell of row) {
      if (hasDecimalComma(cell)) commas += 1;
      else if (cell.includes(".") && !Number.isNaN(decimalOf(cell))) points += 1;
    }
  }
  return commas > points ? "comma" : "point";
}

/** Words that are in use for "no value". */
export function isMissingWord(cell: string): boolean {
  return /^(nan|na|n\/a|null|none|nil|missing|-+|\.+)$/i.test(cell);
}
