import { InputError } from "@rainreckon/core";
import { guessDelimiter, parseLines, readHeadText, readTextEnds } from "./delimited.ts";
import type { Guess } from "./guess.ts";
import { guessReadings, type ReadingsGuess } from "./sniff-readings.ts";
import { guessStations, type StationsGuess } from "./sniff-stations.ts";
import { isAmbiguousDate, StampScanner } from "./stamp.ts";
import { MOST, share } from "./table-sample.ts";

/** What a text file looks like from its first and last 64 KiB. */
export type TableGuess =
  | {
      readonly kind: "readings";
      readonly delimiter: string;
      readonly columns: readonly string[];
      readonly readings: ReadingsGuess;
    }
  | {
      readonly kind: "stations";
      readonly delimiter: string;
      readonly columns: readonly string[];
      readonly stations: StationsGuess;
    }
  | { readonly kind: "unknown"; readonly reason: string };

/**
 * Looks at a text file that may hold gauge readings or stations, without reading all of it.
 *
 * Everything that is not plain fact is a {@link Guess} with its reason.
 *
 * @throws InputError where the file cannot be opened
 */
export async function sniffTable(path: string): Promise<TableGuess> {
  const start = (await readHeadText(path)).trimStart();
  if (start === "") return { kind: "unknown", reason: "the file is empty" };
  if (/^[{[<]/.test(start))
    return { kind: "unknown", reason: "it begins like JSON or XML, not like a table" };
  let ends: Awaited<ReturnType<typeof readTextEnds>>;
  try {
    ends = await readTextEnds(path);
  } catch (fault) {
    if (!(fault instanceof InputError)) throw fault;
    return { kind: "unknown", reason: fault.what };
  }
  const delimiter = guessDelimiter(ends.headLines);
  if (delimiter === undefined)
    return { kind: "unknown", reason: "no delimiter parts its lines into columns" };
  const [columns, ...head] = parseLines(ends.headLines, delimiter);
  const tail = ends.tailLines === "" ? [] : parseLines(ends.tailLines, delimiter);
  const rows = [...head, ...tail].filter((row) => row.length >= columns.length);
  if (rows.length === 0) return { kind: "unknown", reason: "there is no row under the header" };

  const timeAt = timeColumn(columns, rows);
  const sample = { columns, rows, headRows: head.length, whole: ends.tailLines === "", timeAt };
  const stations = guessStations(sample);
  if (stations !== undefined) return { kind: "stations", delimiter, columns, stations };
  if (timeAt >= 0) {
    return { kind: "readings", delimiter, columns, readings: guessReadings(sample) };
  }
  const ambiguous = columns.find((_, at) => share(rows, at, isAmbiguousDate) >= MOST);
  return {
    kind: "unknown",
    reason:
      ambiguous === undefined
        ? "it has neither a column of times nor two of coordinates"
        : `the dates in column "${ambiguous}" leave day and month open; write them like 2031-05-03T12:05`,
  };
}

function timeColumn(columns: readonly string[], rows: readonly (readonly string[])[]): number {
  const stamps = new StampScanner();
  const candidates = columns
    .map((_, at) => at)
    .filter((at) => share(rows, at, (cell) => stamps.scan(cell)) >= MOST);
  // Where there are several, such as a start and an end, the one that says "time" and not "start" is it.
  const score = (at: number) =>
    (/time|date|stamp|zeit|datum/i.test(columns[at]) ? 1 : 0) -
    (/start|begin|from/i.test(columns[at]) ? 2 : 0);
  return candidates.sort((a, b) => score(b) - score(a) || a - b)[0] ?? -1;
}
