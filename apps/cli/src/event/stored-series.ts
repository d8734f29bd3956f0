import { durationMs, type RainSeries } from "@rainreckon/accumulation";
import { InputError } from "@rainreckon/core";
import { displayText } from "@rainreckon/formats";
import { type FinishedRun, numberOf, tableOf } from "../export/finished-run.ts";
import { nearest } from "../text/nearest.ts";
import { groupedBy } from "./grouped.ts";
import type { PlaceSeries } from "./place-series.ts";
import { storedRange } from "./stored-range.ts";

type Row = Readonly<Record<string, string>>;

/** Tables of a run that hold steps of places. */
const TABLES = {
  catchment: { file: "catchments.csv", id: "catchment_id", flag: "--catchment" },
  asset: { file: "assets.csv", id: "asset_id", flag: "--asset" },
} as const;
export type StoredKind = keyof typeof TABLES;

/** Places of one kind whose steps a run has stored. */
export interface StoredPlaces {
  readonly ids: readonly string[];
  /** @throws InputError (kind "usage") where there is none of this id or name */
  seriesOf(id: string): PlaceSeries;
}

/** The places of a kind that a run holds; none where it has no such table. */
export async function storedPlaces(run: FinishedRun, kind: StoredKind): Promise<StoredPlaces> {
  const { file, id: idColumn } = TABLES[kind];
  const has = run.done.manifest.outputs.some((output) => output.file === file);
  const byId = groupedBy(has ? await tableOf(run, file) : [], (row) => row[idColumn] ?? "");
  return {
    ids: [...byId.keys()],
    seriesOf(asked) {
      const id = byId.has(asked) ? asked : [...byId].find(([, rows]) => rows[0]?.name === asked)?.[0];
      const rows = id === undefined ? undefined : byId.get(id);
      if (id === undefined || rows === undefined) throw notThere(kind, asked, [...byId.keys()]);
      return seriesOfRows(run, kind, id, rows);
    },
  };
}

function seriesOfRows(
  { plan }: FinishedRun,
  kind: StoredKind,
  id: string,
  rows: readonly Row[],
): PlaceSeries {
  const stepMs = durationMs(plan.intervals.series);
  const startEpochMs = Date.parse(plan.window.from);
  const count = Math.ceil((Date.parse(plan.window.to) - startEpochMs) / stepMs);
  const unknown = () => new Float64Array(count).fill(Number.NaN);
  const [depthMm, radarMm, p10Mm, p90Mm] = [unknown(), unknown(), unknown(), unknown()];
  const observedFraction = new Float64Array(count);
  const atCap = new Uint8Array(count);
  let window: Row | undefined;
  for (const row of rows) {
    const from = Date.parse(row.start ?? "");
    const to = Date.parse(row.end ?? "");
    // The window leads its place; steps follow, and rain days may be as long as a step is not.
    const isStep = to - from === stepMs || (to - from < stepMs && to === Date.parse(plan.window.to));
    if (window === undefined) window = row;
    else if (isStep && (from - startEpochMs) % stepMs === 0) {
      const step = Math.round((from - startEpochMs) / stepMs);
      depthMm[step] = numberOf(row.depth_observed_mm);
      radarMm[step] = numberOf(row.radar_mm);
      p10Mm[step] = numberOf(row.p10_mm);
      p90Mm[step] = numberOf(row.p90_mm);
      observedFraction[step] = numberOf(row.observed_fraction) || 0;
      atCap[step] = isAtCap(row) ? 1 : 0;
    }
  }
  const known = (cell: string | undefined) => {
    const number = numberOf(cell);
    return Number.isNaN(number) ? null : number;
  };
  const adjusted = known(window?.adjusted_mm) !== null;
  const least = known(window?.min_3x3_mm);
  const most = known(window?.max_3x3_mm);
  const areaKm2 = kind === "catchment" ? numberOf(window?.area_km2) : plan.grid.cellM ** 2 / 1e6;
  const windowEnds = {
    depthMm: numberOf(window?.depth_observed_mm),
    p10Mm: numberOf(window?.p10_mm),
    p90Mm: numberOf(window?.p90_mm),
  };
  const best: RainSeries = { startEpochMs, stepMs, depthMm, observedFraction, atCap };
  return {
    kind,
    id,
    name: window?.name ?? "",
    latDeg: known(window?.lat_deg),
    lonDeg: known(window?.lon_deg),
    areaKm2,
    figure: adjusted ? "adjusted" : "radar",
    from: "tables",
    exact: null,
    best,
    radarMm,
    rangeOf: storedRange(best, { p10Mm, p90Mm }, windowEnds),
    window: {
      depthMm: known(window?.depth_observed_mm),
      radarMm: known(window?.radar_mm),
      adjustedMm: known(window?.adjusted_mm),
      gaugesOnlyMm: known(window?.gauges_only_mm),
      p10Mm: known(window?.p10_mm),
      p90Mm: known(window?.p90_mm),
      observedFraction: numberOf(window?.observed_fraction) || 0,
      atCap: window !== undefined && isAtCap(window),
      volumeM3: known(window?.volume_m3),
      range3x3: least === null || most === null ? null : { leastMm: least, mostMm: most, cellCount: 9 },
    },
    gauge: undefined,
    notes: [],
  };
}

/** The tables say so in words. */
function isAtCap(row: Row): boolean {
  return (row.reason ?? "").split("; ").includes("at cap");
}

function notThere(kind: StoredKind, asked: string, ids: readonly string[]): InputError {
  const { file, flag } = TABLES[kind];
  const meant = nearest(asked, ids);
  const fix =
    ids.length === 0
      ? `its plan names no ${kind}s that could be read; ask for a place with --at, or give --assets FILE`
      : `${meant === undefined ? "" : `did you mean "${displayText(meant)}"? `}${file} lists them`;
  return new InputError(`no such ${kind} takes part in this run`, `${flag} ${displayText(asked)}`, fix, {
    kind: "usage",
  });
}
