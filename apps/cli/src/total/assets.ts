import { existsSync } from "node:fs";
import path from "node:path";
import type { CellFractions } from "@rainreckon/accumulation";
import { type Grid, InputError, type Notice } from "@rainreckon/core";
import { readStations, type StationColumns, type StationTableForm } from "@rainreckon/formats";
import { type Projection, projection } from "@rainreckon/mosaic";
import type { ManifestInput } from "../manifest.ts";
import type { LoadedPlan } from "../plan/load.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import { counted } from "../ui/numbers.ts";
import { hashFile } from "./inputs.ts";
import { placePoint, WIDEN_GRID } from "./places.ts";

/** Most asset steps of one run: what more of them take in memory and in assets.csv is out of proportion. */
const MOST_ASSET_STEPS = 20_000_000;

/** A point that figures are asked for. They are those of the grid cell that holds it. */
export interface PlacedAsset {
  readonly id: string;
  readonly name: string;
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly cell: number;
  /** Its cell, whole. */
  readonly cells: CellFractions;
  /** Of its cell. */
  readonly areaKm2: number;
}

/** A cell of the grid as an area of its own. */
export function cellAsArea(grid: Grid, cell: number): CellFractions {
  return {
    cells: Int32Array.of(cell),
    fraction: Float64Array.of(1),
    areaM2: grid.cellM * grid.cellM,
    insideGrid: 1,
  };
}

/** Where a table of points lies, and how it is written. */
export interface AssetTable extends StationTableForm {
  readonly columns: StationColumns;
  /** Coordinate system of x and y. */
  readonly crs: string;
}

/**
 * Reads a table of points and puts them on the grid; one outside it, or at no place on Earth, is left out and named
 * with its line.
 *
 * @param file - absolute path
 * @throws InputError where the table cannot be read, or its coordinate system is not known
 */
export async function readAssets(
  file: string,
  table: AssetTable,
  grid: Grid,
  map: Projection,
  onNotice: (notice: Notice) => void,
): Promise<PlacedAsset[]> {
  const rows = await readStations(file, table.columns, onNotice, table);
  const system = projection(table.crs);
  const placed: PlacedAsset[] = [];
  for (const row of rows) {
    const [lonDeg, latDeg] = system.geographic ? [row.x, row.y] : system.inverse(row.x, row.y);
    const onEarth = Math.abs(latDeg) <= 90 && Math.abs(lonDeg) <= 360;
    const { cell } = onEarth ? placePoint(grid, map, { lonDeg, latDeg }, "nearest") : { cell: -1 };
    const leaveOut = (what: string, fix: string) =>
      onNotice({ what: `asset ${row.id} ${what}: left out`, where: `${file}, line ${row.line}`, fix });
    if (!onEarth) leaveOut("is at no place on Earth", "check its coordinates and their system");
    else if (cell < 0)
      leaveOut("lies outside the grid", `check its coordinates and their system, or ${WIDEN_GRID}`);
    else
      placed.push({
        id: row.id,
        name: row.name ?? "",
        lonDeg,
        latDeg,
        cell,
        cells: cellAsArea(grid, cell),
        areaKm2: (grid.cellM * grid.cellM) / 1e6,
      });
  }
  return placed;
}

/** The assets of a plan, on its grid. What cannot be read is named and leaves the run without them. */
export async function assetsOf(
  loaded: LoadedPlan,
  grid: Grid,
  map: Projection,
  stepCount: number,
  log: LeftOutLog,
  seen: (input: ManifestInput) => void,
): Promise<PlacedAsset[]> {
  const { assets } = loaded.plan;
  if (assets === undefined) return [];
  const file = path.resolve(loaded.folder, assets.file);
  const onNotice = (notice: Notice) =>
    log.add("assets", { ...notice, where: notice.where.replace(file, assets.file) });
  let placed: PlacedAsset[] = [];
  let use: ManifestInput["use"] = "left out";
  try {
    placed = await readAssets(file, assets, grid, map, onNotice);
    if (placed.length * stepCount > MOST_ASSET_STEPS) {
      onNotice({
        what: `${counted(placed.length, "asset")} in ${counted(stepCount, "step")} are too many: all are left out`,
        where: file,
        fix: "name fewer assets, make intervals.series longer, or the window shorter",
      });
      placed = [];
    } else use = "used";
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    onNotice({ what: error.what, where: error.where, fix: error.fix });
  }
  if (existsSync(file)) {
    const { name, sha256, bytes } = await hashFile(loaded.folder, file);
    seen({ path: name, kind: "assets", sha256, bytes, use });
  }
  return placed;
}
