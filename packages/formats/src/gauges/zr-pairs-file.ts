import { InputError } from "@rainreckon/core";
import { decimalOf, whyNoNumber } from "./decimal.ts";
import { streamRows } from "./delimited.ts";
import { displayText } from "./display-text.ts";
import { FileNotices, type OnNotice } from "./file-notices.ts";

/** Most pairs of one file. */
const MAX_PAIRS = 1_000_000;
/** What a weather radar can show, dBZ, and more rain than was ever measured over a minute, mm/h. House rule. */
const DBZ = { low: -60, high: 100 };
const MOST_MM_PER_HOUR = 3000;

const NAMES = {
  dbz: "reflectivity_dbz",
  z: "z_mm6_per_m3",
  rate: "rain_rate_mm_per_h",
  gauge: "gauge",
  end: "end",
} as const;

/** Pairs of reflectivity and rain rate from a table. Shapes [n]. */
export interface ZrPairTable {
  /** -Infinity where Z is 0. */
  readonly dbz: Float64Array;
  readonly rateMmPerHour: Float64Array;
  /** The gauge of each pair, and the end of its interval; undefined without that column. */
  readonly gauges: readonly string[] | undefined;
  readonly endEpochMs: Float64Array | undefined;
  readonly rowsLeftOut: number;
}

/**
 * Reads pairs of reflectivity and rain rate: columns `reflectivity_dbz` or `z_mm6_per_m3`, and `rain_rate_mm_per_h`;
 * `gauge` and `end` (an instant with its offset from UTC) where there are some.
 *
 * Rows with a cell that is no number, that no radar or gauge can have measured, or without gauge or end where the
 * column is there, are left out and told by line.
 *
 * @throws InputError where the file cannot be read, a column is missing or there twice, or no row is left
 */
export async function readZrPairs(path: string, onNotice: OnNotice): Promise<ZrPairTable> {
  const notices = new FileNotices(onNotice);
  const dbz: number[] = [];
  const rates: number[] = [];
  const gauges: string[] = [];
  const ends: number[] = [];
  let at: Record<keyof typeof NAMES, number> = { dbz: -1, z: -1, rate: -1, gauge: -1, end: -1 };
  let rows = 0;
  const leaveOut = (kind: string, what: string, line: number, fix: string) =>
    notices.tell(kind, `${what}: the pair is left out`, path, [line], fix);

  await streamRows(
    path,
    {},
    {
      header: (cells) => {
        at = placesOf(cells, path);
      },
      quoteFault: (line, lineCount) => {
        rows += 1;
        leaveOut(
          "rows with a stray quotation mark",
          `a quotation mark is not closed, or closed within a cell, and swallows ${lineCount} lines`,
          line,
          "write plain numbers",
        );
      },
      undecoded: (line, encoding) => {
        rows += 1;
        leaveOut(
          "rows with a character that cannot be decoded",
          `the row holds a character that is not ${encoding}`,
          line,
          "write the table in UTF-8",
        );
      },
      row: (cells, line) => {
        rows += 1;
        if (rows > MAX_PAIRS) {
          throw new InputError(`there are more than ${MAX_PAIRS} pairs`, path, "give a smaller table");
        }
        const fault = (name: string, cell: string, why: string) =>
          leaveOut(
            "pairs that cannot be read",
            `column "${name}": "${displayText(cell, 40)}" ${why}`,
            line,
            "write dBZ, mm6 m-3 and mm/h as plain numbers with a decimal point",
          );
        const inDbz = at.dbz >= 0;
        const name = inDbz ? NAMES.dbz : NAMES.z;
        const echo = cells[inDbz ? at.dbz : at.z] ?? "";
        const value = decimalOf(echo);
        const reflectivity = inDbz ? value : 10 * Math.log10(value);
        const rain = cells[at.rate] ?? "";
        const rate = decimalOf(rain);
        if (Number.isNaN(value)) return fault(name, echo, whyNoNumber(echo));
        if (Number.isNaN(rate)) return fault(NAMES.rate, rain, whyNoNumber(rain));
        const isNone = !inDbz && value === 0;
        if (!isNone && !(reflectivity >= DBZ.low && reflectivity <= DBZ.high)) {
          return fault(name, echo, `is no reflectivity from ${DBZ.low} to ${DBZ.high} dBZ`);
        }
        if (!(rate >= 0 && rate <= MOST_MM_PER_HOUR)) {
          return fault(NAMES.rate, rain, `is no rain rate from 0 to ${MOST_MM_PER_HOUR} mm/h`);
        }
        const gauge = at.gauge < 0 ? "" : (cells[at.gauge] ?? "");
        if (at.gauge >= 0 && gauge === "") return fault(NAMES.gauge, gauge, "names no gauge");
        const end = at.end < 0 ? 0 : instantOf(cells[at.end] ?? "");
        if (Number.isNaN(end)) {
          return fault(NAMES.end, cells[at.end] ?? "", "is no instant like 2031-05-20T12:00Z");
        }
        dbz.push(isNone ? Number.NEGATIVE_INFINITY : reflectivity);
        rates.push(rate);
        gauges.push(gauge);
        ends.push(end);
      },
    },
  );
  notices.close();
  if (dbz.length === 0) {
    throw new InputError(
      "no pair is left",
      path,
      `write rows under ${NAMES.dbz} (or ${NAMES.z}) and ${NAMES.rate}`,
      { kind: "no-input" },
    );
  }
  return {
    dbz: Float64Array.from(dbz),
    rateMmPerHour: Float64Array.from(rates),
    gauges: at.gauge < 0 ? undefined : gauges,
    endEpochMs: at.end < 0 ? undefined : Float64Array.from(ends),
    rowsLeftOut: rows - dbz.length,
  };
}

function placesOf(cells: readonly string[], path: string): Record<keyof typeof NAMES, number> {
  const twice = Object.values(NAMES).find((name) => cells.indexOf(name) !== cells.lastIndexOf(name));
  if (twice !== undefined) {
    throw new InputError(`the column "${twice}" is there twice`, path, "keep one of them");
  }
  const at = {
    dbz: cells.indexOf(NAMES.dbz),
    z: cells.indexOf(NAMES.z),
    rate: cells.indexOf(NAMES.rate),
    gauge: cells.indexOf(NAMES.gauge),
    end: cells.indexOf(NAMES.end),
  };
  if (at.dbz >= 0 && at.z >= 0) {
    throw new InputError(
      "reflectivity is there both as dBZ and as Z",
      path,
      `keep one of the columns ${NAMES.dbz} and ${NAMES.z}`,
    );
  }
  const missing =
    at.rate < 0 ? NAMES.rate : at.dbz < 0 && at.z < 0 ? `${NAMES.dbz}" or "${NAMES.z}` : undefined;
  if (missing !== undefined) {
    const there = cells.map((cell) => displayText(cell, 40)).join(", ");
    throw new InputError(
      `there is no column "${missing}"`,
      path,
      `name it so in the header, which has ${displayText(there, 200)}`,
    );
  }
  return at;
}

/** An instant with its offset; NaN for anything else. */
function instantOf(cell: string): number {
  const stamp = /^\d{4}-\d\d-\d\d[T ]\d\d:\d\d(:\d\d(\.\d+)?)?(Z|[+-]\d\d:?\d\d)$/;
  return stamp.test(cell) ? Date.parse(cell.replace(" ", "T")) : Number.NaN;
}
