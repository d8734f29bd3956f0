import { decimalOf } from "./decimal.ts";

/** A table as the guesses see it: a header and the rows of both ends of the file, cells trimmed. */
export interface TableSample {
  readonly columns: readonly string[];
  readonly rows: readonly (readonly string[])[];
  /** How many of `rows` come from the head; the others are from the tail. */
  readonly headRows: number;
  /** Whether `rows` are all there are. */
  readonly whole: boolean;
  /** Column of stamps. */
  readonly timeAt: number;
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
export function isNumeric(rows: readonly (readonly string[])[], at: number): boolean {
  const numbers = share(rows, at, (cell) => !Number.isNaN(decimalOf(cell)));
  return (
    numbers > 0 && share(rows, at, (cell) => !Number.isNaN(decimalOf(cell)) || isMissingWord(cell)) >= MOST
  );
}

/** Words that are in use for "no value". */
export function isMissingWord(cell: string): boolean {
  return /^(nan|na|n\/a|null|none|nil|missing|-+|\.+)$/i.test(cell);
}
