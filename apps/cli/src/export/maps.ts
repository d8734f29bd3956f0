import path from "node:path";
import { cutWindow, durationMs } from "@rainreckon/accumulation";
import { InputError } from "@rainreckon/core";
import { openTotalsLayers, writeGeoTiff } from "@rainreckon/formats";
import { checkedOutput } from "../explain/open-run.ts";
import { gridMap } from "../total/prepare.ts";
import { counted, lengthText } from "../ui/numbers.ts";
import type { FinishedRun } from "./finished-run.ts";
import type { ExportReport } from "./schema.ts";
import { targetFolder, writeTarget } from "./target.ts";

/** Which maps are wanted, and where. */
export interface MapsAsked {
  readonly folder: string;
  readonly replace: boolean;
  readonly value: "best" | "radar" | "adjusted";
}

/**
 * Writes a GeoTIFF for each interval of the run's maps, named after what it holds and the time that it covers.
 *
 * @throws InputError (kind "usage") where the run has no such depths
 */
export async function exportMaps(run: FinishedRun, asked: MapsAsked): Promise<ExportReport> {
  const { plan } = run;
  const window = { startEpochMs: Date.parse(plan.window.from), endEpochMs: Date.parse(plan.window.to) };
  const lengthMs = durationMs(plan.intervals.grids);
  const intervals = cutWindow(window, lengthMs, window.startEpochMs % durationMs(plan.intervals.series));
  const totals = await checkedOutput(run.folder, run.done, "totals.nc");
  const names = asked.value === "best" ? ["adjusted_depth", "radar_depth"] : [`${asked.value}_depth`];
  let name = "";
  let layers: Awaited<ReturnType<typeof openTotalsLayers>>;
  for (name of names) {
    layers = await openTotalsLayers(totals, name);
    if (layers !== undefined) break;
  }
  if (layers === undefined)
    throw new InputError(
      `the run has no ${name}`,
      totals,
      "take --value radar, or see README.txt for the reason",
      {
        kind: "usage",
      },
    );
  const folder = targetFolder(asked.folder, run.folder);
  const files: string[] = [];
  let missing = 0;
  try {
    for (const [index, { startEpochMs, endEpochMs }] of intervals.entries()) {
      const values = layers.layer(index);
      for (const value of values) if (Number.isNaN(value)) missing++;
      const file = path.join(folder, `${name}_${compact(startEpochMs)}_${compact(endEpochMs)}.tif`);
      await writeTarget(file, { run: run.folder, replace: asked.replace }, (draft) =>
        writeGeoTiff(draft, {
          grid: plan.grid,
          projString: gridMap(plan.grid).projString,
          values,
          description: name,
          unit: "mm",
        }),
      );
      files.push(file);
    }
  } finally {
    layers.close();
  }
  return {
    format: "rainreckon-export-1",
    run: run.folder,
    kind: "maps",
    files,
    rows: files.length,
    missing,
    says: [
      `${counted(files.length, "map")} of ${name} in mm, one for each ${lengthText(lengthMs)}; the name says start and end, UTC`,
      missing === 0
        ? "every cell was observed"
        : `${counted(missing, "cell")} over all maps not observed: NaN, never 0`,
    ],
  };
}

/** 20310520T120000Z: an instant that every file system takes in a name. */
function compact(epochMs: number): string {
  return new Date(epochMs).toISOString().replace(/\.\d+/, "").replace(/[-:]/g, "");
}
