import { type ArealReductionTable, InputError } from "@rainreckon/core";
import { positiveOf, readSmallTable, saidOnce, type TableRow } from "./table-cells.ts";

/**
 * Reads areal reductions, one a row: CSV with the columns duration_min, area_km2 and factor, and a source in a line
 * above the header or a column. The table must be whole.
 *
 * @throws InputError, with file and line, for a gap, a row twice, and a factor that is not above 0 and at most 1
 */
export async function readArealReduction(path: string): Promise<ArealReductionTable> {
  const table = await readSmallTable(path, "duration_min");
  for (const name of ["area_km2", "factor"]) {
    if (table.columns.includes(name)) continue;
    throw new InputError(`there is no column ${name}`, `${path}, line ${table.headerLine}`, "name it so");
  }
  const rows = new Map<string, TableRow>();
  for (const row of table.rows) {
    const key = `${positiveOf(path, row, "duration_min")}|${positiveOf(path, row, "area_km2")}`;
    const before = rows.get(key);
    if (before !== undefined) {
      const where = `${path}, line ${row.line}`;
      throw new InputError(
        `this duration and area stand in line ${before.line} already`,
        where,
        "delete one",
      );
    }
    rows.set(key, row);
  }
  const ascending = (k: 0 | 1) =>
    [...new Set([...rows.keys()].map((key) => Number(key.split("|")[k])))].sort((a, b) => a - b);
  const [durationsMin, areasKm2] = [ascending(0), ascending(1)];
  const factor = durationsMin.map((minutes) =>
    areasKm2.map((km2) => {
      const row = rows.get(`${minutes}|${km2}`);
      if (row === undefined)
        throw new InputError(`there is no factor for ${minutes} min and ${km2} km2`, path, "fill the gap");
      const value = positiveOf(path, row, "factor");
      if (value <= 1) return value;
      throw new InputError(
        `factor ${value} is above 1`,
        `${path}, line ${row.line}`,
        "write the share of the point depth that its mean over the area has, not a percentage",
      );
    }),
  );
  return { source: saidOnce(path, table, "source")?.value ?? "", durationsMin, areasKm2, factor };
}
