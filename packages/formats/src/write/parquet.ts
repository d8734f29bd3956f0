import { writeFile } from "node:fs/promises";
import { type ColumnSource, parquetWriteBuffer } from "hyparquet-writer";
import { outputFault } from "./fault.ts";
import { withoutControlCharacters } from "./text.ts";

/** One column of a Parquet table; a value that is missing is `undefined`, or NaN for a number, and stored as null. */
export type ParquetColumn =
  | { readonly name: string; readonly kind: "text"; readonly values: readonly (string | undefined)[] }
  | { readonly name: string; readonly kind: "number"; readonly values: ArrayLike<number> }
  | { readonly name: string; readonly kind: "instant"; readonly values: ArrayLike<number> }
  | { readonly name: string; readonly kind: "flag"; readonly values: readonly (boolean | undefined)[] };

/** Rows that are packed together: a reader takes a part of a long table without the rest. */
const ROW_GROUP = 100_000;

/**
 * Write a table as Apache Parquet to exactly this path: text as UTF-8, numbers as double, instants (milliseconds since
 * 1970-01-01 UTC) as timestamps in UTC, every column nullable, packed with Snappy. The same table gives the same bytes.
 *
 * @param columns - all of one length; names must differ
 * @throws InputError when the file cannot be written; RangeError for columns of different lengths or equal names
 */
export async function writeParquet(path: string, columns: readonly ParquetColumn[]): Promise<void> {
  const names = new Set(columns.map(({ name }) => name));
  const lengths = new Set(columns.map(({ values }) => values.length));
  if (names.size !== columns.length || lengths.size > 1)
    throw new RangeError("columns must have names of their own and one length");
  const bytes = parquetWriteBuffer({
    columnData: columns.map(sourceOf),
    rowGroupSize: ROW_GROUP,
    createdBy: "rainreckon",
  });
  await writeFile(path, new Uint8Array(bytes)).catch((cause: unknown) => {
    throw outputFault(path, cause);
  });
}

function sourceOf(column: ParquetColumn): ColumnSource {
  const { name } = column;
  switch (column.kind) {
    case "text":
      return {
        name,
        type: "STRING",
        nullable: true,
        data: column.values.map((value) => (value === undefined ? null : withoutControlCharacters(value))),
      };
    case "number":
      return { name, type: "DOUBLE", nullable: true, data: Array.from(column.values, orNull) };
    case "instant":
      return {
        name,
        type: "TIMESTAMP",
        nullable: true,
        data: Array.from(column.values, (value) => (Number.isNaN(value) ? null : new Date(value))),
      };
    case "flag":
      return { name, type: "BOOLEAN", nullable: true, data: column.values.map((value) => value ?? null) };
  }
}

function orNull(value: number): number | null {
  return Number.isNaN(value) ? null : value;
}
