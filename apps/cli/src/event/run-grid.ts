import { cutWindow, durationMs, type RainSeries } from "@rainreckon/accumulation";
import { type Grid, InputError, type Interval } from "@rainreckon/core";
import { openTotalsLayers, readTotals } from "@rainreckon/formats";
import type { Projection } from "@rainreckon/mosaic";
import { checkedOutput } from "../explain/open-run.ts";
import type { FinishedRun } from "../export/finished-run.ts";
import type { PlacedAsset } from "../total/assets.ts";
import { rangeOf3x3 } from "../total/place-planes.ts";
import { gridMap } from "../total/prepare.ts";
import { NO_ENDS, type PlaceSeries } from "./place-series.ts";

/** Most values of depths on a grid that are held at once. */
const MOST_VALUES = 400_000_000;

/** Depths of a run by grid interval, as totals.nc has them. */
export interface RunGrid {
  readonly grid: Grid;
  readonly map: Projection;
  readonly figure: "adjusted" | "radar";
  readonly intervals: readonly Interval[];
  /** Shape [intervals][cells]: the figure to use, and the radar's. */
  readonly bestMm: readonly Float32Array[];
  readonly radarMm: readonly Float32Array[];
  /** Shape [cells], of the window. */
  readonly totalMm: Float32Array;
  readonly radarTotalMm: Float32Array;
  readonly observedFraction: Float32Array;
  readonly capShare: Float32Array;
}

/** @throws InputError where totals.nc is missing, changed, or too large to be looked at whole */
export async function openRunGrid(run: FinishedRun, withRadar: boolean): Promise<RunGrid> {
  const { plan, folder, done } = run;
  const file = await checkedOutput(folder, done, "totals.nc");
  const window = { startEpochMs: Date.parse(plan.window.from), endEpochMs: Date.parse(plan.window.to) };
  const lengthMs = durationMs(plan.intervals.grids);
  const intervals = cutWindow(window, lengthMs, window.startEpochMs % durationMs(plan.intervals.series));
  const cells = plan.grid.nx * plan.grid.ny;
  if (intervals.length * cells * (withRadar ? 2 : 1) > MOST_VALUES) {
    throw new InputError(
      `${intervals.length} intervals of ${cells} cells are too many to be looked at at once`,
      file,
      "run total on a shorter window, or with longer intervals.grids",
      { kind: "usage" },
    );
  }
  const planes = await readTotals(file, ["radar_total", "adjusted_total", "observed_fraction", "cap_share"]);
  const plane = (name: string) => {
    const values = planes.get(name);
    if (values === undefined) throw new InputError(`it has no ${name}`, file, "run total again with --force");
    return values;
  };
  const radarMm = async () => (await layersOf(file, "radar_depth", intervals.length)) ?? [];
  const adjusted = await layersOf(file, "adjusted_depth", intervals.length);
  const bestMm = adjusted ?? (await radarMm());
  return {
    grid: plan.grid,
    map: gridMap(plan.grid),
    figure: adjusted === undefined ? "radar" : "adjusted",
    intervals,
    bestMm,
    radarMm: withRadar && adjusted !== undefined ? await radarMm() : bestMm,
    totalMm: planes.get("adjusted_total") ?? plane("radar_total"),
    radarTotalMm: plane("radar_total"),
    observedFraction: plane("observed_fraction"),
    capShare: plane("cap_share"),
  };
}

async function layersOf(file: string, name: string, count: number): Promise<Float32Array[] | undefined> {
  const layers = await openTotalsLayers(file, name);
  if (layers === undefined) return undefined;
  try {
    return Array.from({ length: count }, (_, index) => layers.layer(index));
  } finally {
    layers.close();
  }
}

/** Steps of a place as the grid has them: as long as its intervals, so that no shorter duration can be told. */
export function gridSeries(
  { grid, figure, intervals, bestMm, radarMm, totalMm, radarTotalMm, observedFraction, capShare }: RunGrid,
  place: PlacedAsset & Pick<PlaceSeries, "kind">,
): PlaceSeries {
  const { cell } = place;
  const depthMm = Float64Array.from(bestMm, (layer) => layer[cell] as number);
  const observed = observedFraction[cell] || 0;
  const atCap = capShare[cell] >= 0.001;
  const best: RainSeries = {
    startEpochMs: intervals[0]?.startEpochMs ?? 0,
    stepMs: (intervals[0]?.endEpochMs ?? 0) - (intervals[0]?.startEpochMs ?? 0),
    depthMm,
    // Known for the window only: what was not seen may lie in any interval.
    observedFraction: depthMm.map((mm) => (Number.isNaN(mm) ? 0 : observed)),
    atCap: Uint8Array.from(depthMm, (mm) => (atCap && mm > 0 ? 1 : 0)),
  };
  const known = (mm: number) => (Number.isNaN(mm) ? null : mm);
  return {
    kind: place.kind,
    id: place.id,
    name: place.name,
    latDeg: place.latDeg,
    lonDeg: place.lonDeg,
    areaKm2: place.areaKm2,
    figure,
    from: "grid",
    exact: null,
    best,
    radarMm: Float64Array.from(radarMm, (layer) => layer[cell] as number),
    rangeOf: () => NO_ENDS,
    window: {
      depthMm: known(totalMm[cell]),
      radarMm: known(radarTotalMm[cell]),
      adjustedMm: figure === "adjusted" ? known(totalMm[cell]) : null,
      gaugesOnlyMm: null,
      p10Mm: null,
      p90Mm: null,
      observedFraction: observed,
      atCap,
      volumeM3: null,
      range3x3: rangeOf3x3(grid, totalMm, cell) ?? null,
    },
    gauge: undefined,
    notes: [
      "its steps are the intervals of the grid: shares observed and the cap are those of the window, and shorter durations cannot be told",
    ],
  };
}
