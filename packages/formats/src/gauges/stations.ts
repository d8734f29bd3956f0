import { InputError } from "@rainreckon/core";
import { z } from "zod";
import { decimalOf, whyNoNumber } from "./decimal.ts";
import { columnIndex, streamRows } from "./delimited.ts";
import { displayText } from "./display-text.ts";
import { FileNotices, type OnNotice, place } from "./file-notices.ts";

/** Most stations of one table. */
const MAX_STATIONS = 200_000;
/** Common practice for "no elevation". */
const NO_ELEVATION = new Set(["", "NaN", "NA", "-999", "-9999"]);

/** The headers of a station table. */
export interface StationColumns {
  readonly id: string;
  readonly name?: string | undefined;
  readonly x: string;
  readonly y: string;
  readonly elevation?: string | undefined;
}

/** A station as its table has it: x and y in the table's own coordinate system. */
export interface StationRow {
  /** A string always: "007" and "NO" stay what they are. */
  readonly id: string;
  readonly name?: string;
  /** Easting or longitude, northing or latitude. */
  readonly x: number;
  readonly y: number;
  readonly elevationM?: number;
  /** Line of the table, from 1. */
  readonly line: number;
}

const coordinate = z.string().transform((cell, context) => {
  const number = decimalOf(cell);
  if (Number.isNaN(number)) {
    context.addIssue({ code: "custom", message: `"${displayText(cell, 40)}" ${whyNoNumber(cell)}` });
  }
  return number;
});
const stationCells = z.object({ id: z.string().min(1, "no id"), x: coordinate, y: coordinate });

/**
 * Reads a station table.
 *
 * Rows without an id or a readable place are left out; of two rows with one id the first counts. Each is
 * told by line, at most ten of a kind, then how many more there were.
 *
 * @param path - CSV in UTF-8
 * @returns stations in the order of the table
 * @throws InputError where the table cannot be read at all, a column is not there, or no station is left
 */
export async function readStations(
  path: string,
  columns: StationColumns,
  onNotice: OnNotice,
): Promise<readonly StationRow[]> {
  const notices = new FileNotices(onNotice);
  const stations = new Map<string, StationRow>();
  const at = { id: -1, name: -1, x: -1, y: -1, elevation: -1 };
  let rows = 0;
  const leftOut = (kind: string, what: string, line: number, fix: string) =>
    notices.tell(kind, `${what}: the station is left out`, path, [line], fix);

  await streamRows(path, {
    header: (cells) => {
      at.id = columnIndex(cells, columns.id, path);
      at.x = columnIndex(cells, columns.x, path);
      at.y = columnIndex(cells, columns.y, path);
      if (columns.name !== undefined) at.name = columnIndex(cells, columns.name, path);
      if (columns.elevation !== undefined) at.elevation = columnIndex(cells, columns.elevation, path);
    },
    quoteFault: (line, lineCount) =>
      leftOut(
        "rows with a stray quotation mark",
        `a quotation mark is not closed, or closed within a cell, and swallows ${lineCount} lines`,
        line,
        'write a quotation mark within a cell as ""',
      ),
    row: (cells, line) => {
      rows += 1;
      if (rows > MAX_STATIONS) {
        throw new InputError(`there are more than ${MAX_STATIONS} stations`, path, "give a smaller table");
      }
      const read = stationCells.safeParse({
        id: cells[at.id] ?? "",
        x: cells[at.x] ?? "",
        y: cells[at.y] ?? "",
      });
      if (!read.success) {
        const { path: field, message } = read.error.issues[0];
        const column = columns[field[0] as "id" | "x" | "y"];
        leftOut(
          "stations without an id or a place",
          `column "${displayText(column, 60)}": ${message}`,
          line,
          "write id, x and y, with a decimal point",
        );
        return;
      }
      const name = at.name < 0 ? "" : (cells[at.name] ?? "");
      const elevationM = at.elevation < 0 ? undefined : elevation(cells[at.elevation] ?? "", line);
      const station: StationRow = {
        ...read.data,
        ...(name === "" ? {} : { name }),
        ...(elevationM === undefined ? {} : { elevationM }),
        line,
      };
      const before = stations.get(station.id);
      if (before === undefined) stations.set(station.id, station);
      else tellDuplicate(before, station);
    },
  });
  notices.close();
  if (stations.size === 0) {
    throw new InputError("no station is left", path, "check the columns' names and the coordinates");
  }
  return [...stations.values()];

  function elevation(cell: string, line: number): number | undefined {
    if (NO_ELEVATION.has(cell)) return undefined;
    const elevationM = decimalOf(cell);
    if (!Number.isNaN(elevationM)) return elevationM;
    notices.tell(
      "elevations that cannot be read",
      `the elevation "${displayText(cell, 40)}" ${whyNoNumber(cell)}: taken as not known`,
      path,
      [line],
      "write metres with a decimal point, or leave the cell empty",
    );
    return undefined;
  }

  function tellDuplicate(before: StationRow, station: StationRow): void {
    const samePlace = before.x === station.x && before.y === station.y;
    notices.tell(
      "stations listed twice",
      `station "${displayText(station.id, 60)}" is listed twice, at ${
        samePlace ? "the same place" : "two places"
      }: ${place("", [before.line]).slice(2)} counts`,
      path,
      [before.line, station.line],
      samePlace ? "nothing to do" : "delete the wrong line",
    );
  }
}
