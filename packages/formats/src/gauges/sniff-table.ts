import { InputError } from "@rainreckon/core";
import { parseLines, readHeadBytes, readHeadText, readTextEnds } from "./delimited.ts";
import { type Guess, guessed } from "./guess.ts";
import { guessReadings, type ReadingsGuess } from "./sniff-readings.ts";
import { guessStations, type StationsGuess } from "./sniff-stations.ts";
import { findTimes } from "./sniff-times.ts";
import { guessWaterMl } from "./sniff-waterml.ts";
import { isAmbiguousDate } from "./stamp.ts";
import { findTable } from "./table-form.ts";
import { guessDecimal, MOST, share, type TableSample } from "./table-sample.ts";
import { guessEncoding, type TextEncodingName } from "./text-encoding.ts";
import { looksLikeWaterMl, readWaterMl } from "./waterml.ts";

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
 * Looks at a text file that may hold gauge readings or stations, without reading all of it (WaterML is read
 * whole).
 *
 * Everything that is not plain fact is a {@link Guess} with its reason.
 *
 * @throws InputError where the file cannot be opened, or is a WaterML file that cannot be read
 */
export async function sniffTable(path: string): Promise<TableGuess> {
  const headText = await readHeadText(path);
  const start = headText.trimStart();
  if (start === "") return { kind: "unknown", reason: "the file is empty" };
  if (looksLikeWaterMl(headText)) {
    return { kind: "readings", delimiter: "", columns: [], readings: guessWaterMl(await readWaterMl(path)) };
  }
  if (/^[{[<]/.test(start))
    return { kind: "unknown", reason: "it begins like JSON or XML, not like a table" };
  let ends: Awaited<ReturnType<typeof readTextEnds>>;
  try {
    ends = await readTextEnds(path);
  } catch (fault) {
    if (!(fault instanceof InputError)) throw fault;
    return { kind: "unknown", reason: fault.what };
  }
  const place = findTable(ends.headLines);
  if (place === undefined) return { kind: "unknown", reason: "no delimiter parts its lines into columns" };
  const { delimiter, headerLine, textAbove } = place;
  const lines = ends.headLines.split("\n");
  const linesAbove = lines.slice(0, headerLine - 1).map((line) => line.trim());
  const [columns, ...head] = parseLines(lines.slice(headerLine - 1).join("\n"), delimiter);
  const tail = ends.tailLines === "" ? [] : parseLines(ends.tailLines, delimiter);
  const rows = [...head, ...tail].filter((row) => row.length >= columns.length);
  if (rows.length === 0) return { kind: "unknown", reason: "there is no row under the header" };

  const form = {
    encoding: await encodingOf(path, ends.encoding),
    ...(textAbove ? { headerLine } : {}),
  };
  const time = findTimes(columns, rows);
  const sample: TableSample = {
    columns,
    rows,
    headRows: head.length,
    whole: ends.tailLines === "",
    timeAt: time?.timeAt ?? -1,
    ...(time?.dateAt === undefined ? {} : { dateAt: time.dateAt }),
    decimal: guessDecimal(
      rows.map((row) => row.filter((_, at) => at !== time?.timeAt && at !== time?.dateAt)),
    ),
  };
  const stations = guessStations(sample, form);
  if (stations !== undefined) return { kind: "stations", delimiter, columns, stations };
  if (time !== undefined) {
    return {
      kind: "readings",
      delimiter,
      columns,
      readings: guessReadings(sample, { ...form, times: time, linesAbove, path }),
    };
  }
  const shortYear = columns.find((_, at) => share(rows, at, isAmbiguousDate) >= MOST);
  return {
    kind: "unknown",
    reason:
      shortYear === undefined
        ? "it has neither a column of times nor two of coordinates"
        : `the dates in column "${shortYear}" have years of two digits; write them like 2031-05-03T12:05`,
  };
}

async function encodingOf(path: string, encoding: TextEncodingName): Promise<Guess<TextEncodingName>> {
  const guess = guessEncoding(await readHeadBytes(path), new Uint8Array(0));
  return guess?.value === encoding
    ? guess
    : guessed(encoding, "the bytes further on are not valid UTF-8; Latin-1 is read likewise");
}
