import { type FrequencyTable, InputError } from "@rainreckon/core";
import { positiveOf, readSmallTable, type SmallTable, saidOnce, type TableRow } from "./table-cells.ts";

const MM_PER_INCH = 25.4;
type Column = "depthMm" | "lowMm" | "highMm";
/** The columns of a depth, by unit; the last one has the unit of the depth. */
const NAMES: Readonly<Record<Column, readonly [mm: string, inch: string, plain?: string]>> = {
  depthMm: ["depth_mm", "depth_in"],
  lowMm: ["low_mm", "low_in", "low"],
  highMm: ["high_mm", "high_in", "high"],
};

/**
 * Reads depths by duration and return period, one a row: CSV with the columns duration_min, return_period_years and
 * depth_mm (or depth_in), and low and high (low_mm, high_mm) where the table has an interval of its own. Lines above
 * the header, or columns, say series (AMS, PDS), kind (point, areal), area_km2, source and edition.
 *
 * The table must be whole: a depth for each duration and each period. Nothing in it is mended.
 *
 * @throws InputError, with file and line, for a gap, a row twice, units that mix, and depths that do not rise with the
 * period or fall with the duration
 */
export async function readFrequencyTable(path: string): Promise<FrequencyTable> {
  const table = await readSmallTable(path, "duration_min");
  const perUnit = unitOf(path, table);
  const [depthName, lowName, highName] = (["depthMm", "lowMm", "highMm"] as const).map((column) =>
    columnOf(table, column),
  );
  if (!table.columns.includes("return_period_years"))
    throw fault(
      "there is no column return_period_years",
      path,
      table.headerLine,
      "name the column of the periods so",
    );
  const rows = new Map<string, TableRow>();
  const durations = new Map<number, number>();
  const periods = new Map<number, number>();
  for (const row of table.rows) {
    const minutes = positiveOf(path, row, "duration_min");
    const years = positiveOf(path, row, "return_period_years");
    const key = `${minutes}|${years}`;
    const before = rows.get(key);
    if (before !== undefined) {
      const what = `${minutes} min and ${years} years stand in line ${before.line} already`;
      throw fault(what, path, row.line, "delete the wrong line");
    }
    rows.set(key, row);
    if (!durations.has(minutes)) durations.set(minutes, row.line);
    if (!periods.has(years)) periods.set(years, row.line);
  }
  const durationsMin = [...durations.keys()].sort((a, b) => a - b);
  const periodsYears = [...periods.keys()].sort((a, b) => a - b);
  for (const minutes of durationsMin) {
    const missing = periodsYears.filter((years) => !rows.has(`${minutes}|${years}`));
    if (missing.length === 0) continue;
    const line = durations.get(minutes) ?? 0;
    const what = `there is no depth for ${minutes} min and ${missing.join(", ")} years: the table has a gap`;
    throw fault(what, path, line, "give each duration a depth for every return period of the table");
  }
  const rowAt = (d: number, t: number) => rows.get(`${durationsMin[d]}|${periodsYears[t]}`) as TableRow;
  const matrix = (name: string) =>
    durationsMin.map((_, d) => periodsYears.map((_, t) => perUnit * positiveOf(path, rowAt(d, t), name)));
  const depthMm = matrix(depthName as string);
  const lowMm = lowName === undefined ? undefined : matrix(lowName);
  const highMm = highName === undefined ? undefined : matrix(highName);
  for (const [d, ofDuration] of depthMm.entries()) {
    for (const [t, mm] of ofDuration.entries()) {
      const { line } = rowAt(d, t);
      if (t > 0 && !(mm > ofDuration[t - 1])) {
        const what = `the depth of ${durationsMin[d]} min and ${periodsYears[t]} years is no larger than that of ${periodsYears[t - 1]} years (line ${rowAt(d, t - 1).line})`;
        throw fault(what, path, line, "depths rise with the return period: check both rows, and their units");
      }
      if (d > 0 && mm < depthMm[d - 1][t]) {
        const what = `the depth of ${durationsMin[d]} min and ${periodsYears[t]} years is less than that of ${durationsMin[d - 1]} min (line ${rowAt(d - 1, t).line})`;
        throw fault(
          what,
          path,
          line,
          "depths do not fall with the duration: check both rows, and their units",
        );
      }
      if ((lowMm !== undefined && !(lowMm[d][t] <= mm)) || (highMm !== undefined && !(highMm[d][t] >= mm)))
        throw fault("the depth lies outside its own low and high", path, line, "check the three of them");
      for (const end of [lowMm, highMm]) {
        if (t > 0 && end !== undefined && !(end[d][t] > end[d][t - 1]))
          throw fault("low or high does not rise with the return period", path, line, "check both rows");
      }
    }
  }
  const series = wordOf(path, table, "series", ["AMS", "PDS", "unknown"]);
  if (series !== "PDS" && !(periodsYears[0] > 1)) {
    const line = periods.get(periodsYears[0]) ?? 0;
    const what = `a return period of ${periodsYears[0]} years does not exist in annual maxima`;
    throw fault(
      what,
      path,
      line,
      'leave it out, or write "# series: PDS" above the header if the table counts all exceedances',
    );
  }
  const area = saidOnce(path, table, "area_km2");
  return {
    series,
    kind: wordOf(path, table, "kind", ["point", "areal", "unknown"]),
    ...(area === undefined ? {} : { areaKm2: areaOf(path, area) }),
    source: saidOnce(path, table, "source")?.value ?? "",
    edition: saidOnce(path, table, "edition")?.value ?? "",
    durationsMin,
    periodsYears,
    depthMm,
    ...(lowMm === undefined ? {} : { lowMm }),
    ...(highMm === undefined ? {} : { highMm }),
  };
}

function areaOf(path: string, { value, line }: { readonly value: string; readonly line: number }): number {
  return positiveOf(path, { line, cells: new Map([["area_km2", value]]) }, "area_km2");
}

function columnOf({ columns }: SmallTable, column: Column): string | undefined {
  return NAMES[column].find((name) => name !== undefined && columns.includes(name));
}

/** Millimetres of one unit of the table: all its depths have the same. */
function unitOf(path: string, table: SmallTable): number {
  const names = Object.values(NAMES);
  const inMm = names.map(([mm]) => mm).filter((name) => table.columns.includes(name));
  const inInch = names.map(([, inch]) => inch).filter((name) => table.columns.includes(name));
  if (inMm.length > 0 && inInch.length > 0) {
    const what = `${inMm[0]} and ${inInch[0]} are of two units`;
    throw fault(what, path, table.headerLine, "give all depths in mm, or all in inches");
  }
  if (columnOf(table, "depthMm") === undefined) {
    throw fault(
      "there is no column depth_mm or depth_in",
      path,
      table.headerLine,
      "name the column of the depths by its unit",
    );
  }
  const said = saidOnce(path, table, "unit");
  if (said !== undefined && !(inMm.length > 0 ? /^mm$/i : /^in(ch|ches)?$/i).test(said.value)) {
    const what = `the unit is "${said.value}", and the column says ${inMm.length > 0 ? "mm" : "inches"}`;
    throw fault(what, path, said.line, "let both say the same");
  }
  return inMm.length > 0 ? 1 : MM_PER_INCH;
}

function wordOf<W extends string>(path: string, table: SmallTable, key: string, words: readonly W[]): W {
  const said = saidOnce(path, table, key);
  if (said === undefined) return "unknown" as W;
  const word = words.find((one) => one.toLowerCase() === said.value.toLowerCase());
  if (word !== undefined) return word;
  throw fault(`${key} is "${said.value}"`, path, said.line, `write one of ${words.join(", ")}`);
}

function fault(what: string, path: string, line: number, fix: string): InputError {
  return new InputError(what, `${path}, line ${line}`, fix);
}
