import { InputError, type Interval } from "@rainreckon/core";
import { z } from "zod";
import { type DecimalMark, decimalOf, whyNoNumber } from "./decimal.ts";
import { columnIndex, readHeadText, streamRows, type TableForm } from "./delimited.ts";
import { displayText } from "./display-text.ts";
import { FileNotices, type OnNotice, place } from "./file-notices.ts";
import { type DateForm, StampScanner } from "./stamp.ts";
import { looksLikeWaterMl, readWaterMl } from "./waterml.ts";

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
  /** Columns of the dates between which an entry holds: a gauge that moved has an entry for each place. */
  readonly validFrom?: string | undefined;
  readonly validTo?: string | undefined;
  /** Column of the depth of one tip, mm. */
  readonly tipMm?: string | undefined;
  /** Column that says whether the gauge is heated. */
  readonly heated?: string | undefined;
  /** Column that says which corrections the network has applied already. */
  readonly corrections?: string | undefined;
}

/** How a station table is written; what is left out is found from the file, dates are year, month, day. */
export interface StationTableForm extends TableForm {
  readonly decimal?: DecimalMark | undefined;
  readonly dates?: DateForm | undefined;
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
  /** The entry holds from here on, and up to here; for ever where left out. Days are those of UTC. */
  readonly validFromEpochMs?: number;
  readonly validToEpochMs?: number;
  readonly tipMm?: number;
  readonly heated?: boolean;
  /** In the network's words. */
  readonly corrections?: string;
  /** Line of the table, from 1. */
  readonly line: number;
}

const YES = /^(y|yes|j|ja|oui|true|t|1|heated)$/i;
const NO = /^(n|no|nein|non|false|f|0|unheated|not heated)$/i;
const DAY_MS = 86_400_000;

/** The parts of a row without which it is no station; numbers with the table's decimal mark. */
function stationCellsWith(mark: DecimalMark) {
  const coordinate = z.string().transform((cell, context) => {
    const number = decimalOf(cell, mark);
    if (Number.isNaN(number)) {
      context.addIssue({ code: "custom", message: `"${displayText(cell, 40)}" ${whyNoNumber(cell, mark)}` });
    }
    return number;
  });
  return z.object({ id: z.string().min(1, "no id"), x: coordinate, y: coordinate });
}
const STATION_CELLS = { point: stationCellsWith("point"), comma: stationCellsWith("comma") } as const;

/**
 * Reads a station table, or the monitoring points of a WaterML 2.0 file.
 *
 * Rows without an id or a readable place are left out; of two rows with one id that hold at the same time the
 * first counts. Each is told by line, at most ten of a kind, then how many more there were.
 *
 * @param path - CSV; or WaterML, whose points have longitude and latitude and no columns
 * @returns entries in the order of the table: several with one id where a gauge moved (see `stationsDuring`)
 * @throws InputError where the table cannot be read at all, a column is not there, or no station is left
 */
export async function readStations(
  path: string,
  columns: StationColumns,
  onNotice: OnNotice,
  form: StationTableForm = {},
): Promise<readonly StationRow[]> {
  const notices = new FileNotices(onNotice);
  if (looksLikeWaterMl(await readHeadText(path))) {
    const points = await stationsOfWaterMl(path, notices);
    notices.close();
    return points;
  }
  const mark = form.decimal ?? "point";
  const stationCells = STATION_CELLS[mark];
  const stamps = new StampScanner({ ...(form.dates === undefined ? {} : { dates: form.dates }), dayHour: 0 });
  const stations: StationRow[] = [];
  const byId = new Map<string, StationRow[]>();
  const places = new Map<keyof StationColumns, number>();
  let rows = 0;
  const leftOut = (kind: string, what: string, line: number, fix: string) =>
    notices.tell(kind, `${what}: the station is left out`, path, [line], fix);

  await streamRows(path, form, {
    header: (cells) => {
      for (const [part, name] of Object.entries(columns) as [keyof StationColumns, string | undefined][]) {
        if (name !== undefined) places.set(part, columnIndex(cells, name, path));
      }
    },
    quoteFault: (line, lineCount) =>
      leftOut(
        "rows with a stray quotation mark",
        `a quotation mark is not closed, or closed within a cell, and swallows ${lineCount} lines`,
        line,
        'write a quotation mark within a cell as ""',
      ),
    undecoded: (line, encoding) =>
      leftOut(
        "rows with a character that cannot be decoded",
        `the row holds a character that is not ${encoding}`,
        line,
        "write the table in UTF-8",
      ),
    row: (cells, line) => {
      rows += 1;
      if (rows > MAX_STATIONS) {
        throw new InputError(`there are more than ${MAX_STATIONS} stations`, path, "give a smaller table");
      }
      const cell = (part: keyof StationColumns) => cells[places.get(part) ?? -1] ?? "";
      const read = stationCells.safeParse({ id: cell("id"), x: cell("x"), y: cell("y") });
      if (!read.success) {
        const { path: field, message } = read.error.issues[0];
        const column = columns[field[0] as "id" | "x" | "y"];
        leftOut(
          "stations without an id or a place",
          `column "${displayText(column, 60)}": ${message}`,
          line,
          mark === "point"
            ? "write id, x and y, with a decimal point"
            : "write id, x and y, with a decimal comma",
        );
        return;
      }
      const name = cell("name");
      const elevationM = numberOrNone(cell("elevation"), "elevation", "metres", line);
      const tipMm = numberOrNone(cell("tipMm"), "depth of a tip", "millimetres", line);
      const validFromEpochMs = dayOrNone(cell("validFrom"), 0, line);
      // A date without a time of day is the last day on which the entry holds.
      const validToEpochMs = dayOrNone(cell("validTo"), DAY_MS, line);
      const heated = heatedOrNone(cell("heated"), line);
      const corrections = cell("corrections");
      if (Number.isNaN(validFromEpochMs) || Number.isNaN(validToEpochMs)) return;
      const station: StationRow = {
        ...read.data,
        ...(name === "" ? {} : { name }),
        ...(elevationM === undefined ? {} : { elevationM }),
        ...(validFromEpochMs === undefined ? {} : { validFromEpochMs }),
        ...(validToEpochMs === undefined ? {} : { validToEpochMs }),
        ...(tipMm === undefined || !(tipMm > 0) ? {} : { tipMm }),
        ...(heated === undefined ? {} : { heated }),
        ...(corrections === "" ? {} : { corrections }),
        line,
      };
      const others = byId.get(station.id) ?? [];
      const clash = others.find((other) => holdTogether(other, station));
      if (clash !== undefined) {
        tellDuplicate(clash, station);
        return;
      }
      others.push(station);
      byId.set(station.id, others);
      stations.push(station);
    },
  });
  notices.close();
  if (stations.length === 0) {
    throw new InputError("no station is left", path, "check the columns' names and the coordinates");
  }
  return stations;

  function numberOrNone(cell: string, what: string, unit: string, line: number): number | undefined {
    if (NO_ELEVATION.has(cell)) return undefined;
    const number = decimalOf(cell, mark);
    if (!Number.isNaN(number)) return number;
    notices.tell(
      `${what === "elevation" ? "elevations" : "tips"} that cannot be read`,
      `the ${what} "${displayText(cell, 40)}" ${whyNoNumber(cell, mark)}: taken as not known`,
      path,
      [line],
      `write ${unit} with a decimal ${mark}, or leave the cell empty`,
    );
    return undefined;
  }

  /** @returns NaN where the date cannot be read, which is told: the entry is then left out */
  function dayOrNone(cell: string, dateAddsMs: number, line: number): number | undefined {
    if (cell === "") return undefined;
    if (stamps.scan(cell)) {
      const offsetMs = Number.isNaN(stamps.offsetMinutes) ? 0 : stamps.offsetMinutes * 60_000;
      return stamps.clockMs - offsetMs + (stamps.dateOnly ? dateAddsMs : 0);
    }
    leftOut(
      "entries whose time cannot be read",
      `the date "${displayText(cell, 40)}" cannot be read (${stamps.problem})`,
      line,
      "write it like 2031-05-03",
    );
    return Number.NaN;
  }

  function heatedOrNone(cell: string, line: number): boolean | undefined {
    if (YES.test(cell)) return true;
    if (cell === "" || NO.test(cell)) return cell === "" ? undefined : false;
    notices.tell(
      "stations of which it is not clear whether they are heated",
      `"${displayText(cell, 40)}" is neither yes nor no: taken as not known`,
      path,
      [line],
      "write yes or no",
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

/**
 * The entry of each station that holds during a window: of several the one that holds longest in it.
 *
 * @param where - what the notices call the table
 * @returns by id; a station without an entry that holds is absent
 */
export function stationsDuring(
  rows: readonly StationRow[],
  window: Interval,
  where: string,
  onNotice: OnNotice,
): ReadonlyMap<string, StationRow> {
  const notices = new FileNotices(onNotice);
  const chosen = new Map<string, { row: StationRow; sharedMs: number }>();
  for (const row of rows) {
    const sharedMs =
      Math.min(row.validToEpochMs ?? Number.POSITIVE_INFINITY, window.endEpochMs) -
      Math.max(row.validFromEpochMs ?? Number.NEGATIVE_INFINITY, window.startEpochMs);
    if (!(sharedMs > 0)) continue;
    const before = chosen.get(row.id);
    if (before === undefined) {
      chosen.set(row.id, { row, sharedMs });
      continue;
    }
    const longer = sharedMs >= before.sharedMs ? row : before.row;
    notices.tell(
      "stations that moved within the window",
      `station "${displayText(row.id, 60)}" has two entries that hold within the window: the one of line ${longer.line} holds longer and counts`,
      where,
      [before.row.line, row.line],
      "end the window where the gauge moved",
    );
    if (longer === row) chosen.set(row.id, { row, sharedMs });
  }
  notices.close();
  return new Map([...chosen].map(([id, { row }]) => [id, row]));
}

/** Whether two entries hold at one time for more than a day: one may end on the day on which the next begins. */
function holdTogether(a: StationRow, b: StationRow): boolean {
  const until = Math.min(
    a.validToEpochMs ?? Number.POSITIVE_INFINITY,
    b.validToEpochMs ?? Number.POSITIVE_INFINITY,
  );
  const from = Math.max(
    a.validFromEpochMs ?? Number.NEGATIVE_INFINITY,
    b.validFromEpochMs ?? Number.NEGATIVE_INFINITY,
  );
  return until - from > DAY_MS;
}

async function stationsOfWaterMl(path: string, notices: FileNotices): Promise<readonly StationRow[]> {
  const stations = new Map<string, StationRow>();
  for (const { gaugeId, name, position, line } of await readWaterMl(path)) {
    if (stations.has(gaugeId)) continue;
    if (position === undefined) {
      notices.tell(
        "points without a place",
        `the point "${displayText(gaugeId, 60)}" has no position in longitude and latitude: left out`,
        path,
        [line],
        "give a table of stations",
      );
      continue;
    }
    stations.set(gaugeId, {
      id: gaugeId,
      ...(name === undefined ? {} : { name }),
      x: position.lonDeg,
      y: position.latDeg,
      line,
    });
  }
  if (stations.size === 0) throw new InputError("no point has a position", path, "give a table of stations");
  return [...stations.values()];
}
