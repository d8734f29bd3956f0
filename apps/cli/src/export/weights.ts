import { cellCentre, InputError } from "@rainreckon/core";
import { type CsvColumn, writeCsv } from "@rainreckon/formats";
import { checkInputs, planOf } from "../explain/open-run.ts";
import { loadPlan } from "../plan/load.ts";
import { catchmentsOf, gridMap } from "../total/prepare.ts";
import { leftOutLog } from "../ui/left-out.ts";
import { counted } from "../ui/numbers.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import type { FinishedRun } from "./finished-run.ts";
import type { ExportReport } from "./schema.ts";
import { writeTarget } from "./target.ts";

/** Where the weights go, and where the plan lies if it is no longer where the run found it. */
export interface WeightsAsked {
  readonly file: string;
  readonly replace: boolean;
  readonly plan?: string;
}

interface WeightRow {
  readonly id: string;
  readonly cell: number;
  readonly fraction: number;
  readonly weight: number;
}

/**
 * Writes which cells of the grid make up each catchment: for each the share of the cell inside, and its weight in the
 * catchment's mean, which add up to the share of the catchment that lies on the grid.
 *
 * @throws InputError (kind "usage") where the map of catchments is not the run's, or the run has none
 */
export async function exportWeights(
  run: FinishedRun,
  asked: WeightsAsked,
  terminal: Terminal,
): Promise<ExportReport> {
  const loaded = await loadPlan(asked.plan ?? planOf(run.folder));
  const { manifest } = run.done;
  if (loaded.digest !== manifest.planDigest)
    throw new InputError(
      "this plan is not the one that the run was made with",
      loaded.path,
      "name the plan as it was with --plan, or run total again",
      { kind: "usage" },
    );
  const maps = manifest.inputs.filter(({ kind }) => kind === "catchments");
  await checkInputs(loaded, maps, (total, noun) => progressBar(terminal, total, noun));
  const { grid } = run.plan;
  const map = gridMap(grid);
  const catchments = await catchmentsOf(loaded, grid, map, leftOutLog(terminal), () => undefined);
  if (catchments.length === 0)
    throw new InputError(
      "the run has no catchments on its grid",
      run.folder,
      "name a map of catchments in the plan, and run total again",
      { kind: "usage" },
    );
  const rows = catchments.flatMap(({ id, cells }) =>
    Array.from(
      cells.cells,
      (cell, k): WeightRow => ({
        id,
        cell,
        fraction: cells.fraction[k]!,
        weight: (cells.fraction[k]! * grid.cellM * grid.cellM) / cells.areaM2,
      }),
    ),
  );
  const placeOf = ({ cell }: WeightRow) => {
    const { xM, yM } = cellCentre(grid, cell);
    const [lonDeg, latDeg] = map.inverse(xM, yM);
    return { xM, yM, lonDeg, latDeg };
  };
  const number = (name: string, decimals: number, of: (row: WeightRow) => number): CsvColumn<WeightRow> => ({
    kind: "number",
    name,
    decimals,
    of,
  });
  await writeTarget(asked.file, { run: run.folder, replace: asked.replace }, (draft) =>
    writeCsv(
      draft,
      [
        { kind: "text", name: "catchment_id", of: ({ id }) => id },
        number("row", 0, ({ cell }) => Math.floor(cell / grid.nx)),
        number("column", 0, ({ cell }) => cell % grid.nx),
        number("x_m", 1, (row) => placeOf(row).xM),
        number("y_m", 1, (row) => placeOf(row).yM),
        number("lon_deg", 6, (row) => placeOf(row).lonDeg),
        number("lat_deg", 6, (row) => placeOf(row).latDeg),
        number("cell_fraction", 6, ({ fraction }) => fraction),
        number("weight", 9, ({ weight }) => weight),
      ],
      rows,
    ),
  );
  return {
    format: "rainreckon-export-1",
    run: run.folder,
    kind: "weights",
    files: [asked.file],
    rows: rows.length,
    missing: 0,
    says: [
      `${counted(rows.length, "cell")} of ${counted(catchments.length, "catchment")}; row and column count from 0 in the north-west, as in totals.nc`,
      "cell_fraction: share of the cell inside the catchment; weight: its share in the catchment's mean depth",
    ],
  };
}
