import { createReadStream } from "node:fs";
import { createInterface } from "node:readline";
import { durationMs, type RainSeries } from "@rainreckon/accumulation";
import { InputError } from "@rainreckon/core";
import { displayText } from "@rainreckon/formats";
import { ownCsvStream } from "../compare/own-csv.ts";
import { checkedOutput } from "../explain/open-run.ts";
import { type FinishedRun, numberOf } from "../export/finished-run.ts";
import { nearest } from "../text/nearest.ts";
import type { PlaceSeries } from "./place-series.ts";
import { storedRange } from "./stored-range.ts";

type Row = Readonly<Record<string, string>>;

/** Tables of a run that hold steps of places. */
const TABLES = {
  catchment: { file: "catchments.csv", id: "catchment_id", flag: "--catchment" },
  asset: { file: "assets.csv", id: "asset_id", flag: "--asset" },
} as const;
export type StoredKind = keyof typeof TABLES;

/**
 * Places whose steps a run has stored, in the order in which they are asked for; "all" in that of the table, none where
 * the run has no such table. The table is read row by row: it may be larger than memory.
 *
 * @param wanted - ids, or names
 * @throws InputError (kind "usage") where one of them is not there, or the table was changed since
 */
export async function storedSeries(
  run: FinishedRun,
  kind: StoredKind,
  wanted: "all" | readonly string[],
): Promise<PlaceSeries[]> {
  if (wanted !== "all" && wanted.length === 0) return [];
  const { file, id: idColumn } = TABLES[kind];
  const ids = new Set<string>();
  const found = new Map<string, Gathered>();
  if (run.done.manifest.outputs.some((output) => output.file === file)) {
    const input = createReadStream(await checkedOutput(run.folder, run.done, file), "utf8");
    for await (const row of ownCsvStream(createInterface({ input, crlfDelay: Number.POSITIVE_INFINITY }))) {
      const id = row[idColumn] ?? "";
      ids.add(id);
      if (wanted !== "all" && !wanted.includes(id) && !wanted.includes(row.name ?? "")) continue;
      const gathered = found.get(id) ?? new Gathered(run, row);
      if (found.has(id)) gathered.add(row);
      else found.set(id, gathered);
    }
  }
  if (wanted === "all") return [...found].map(([id, gathered]) => gathered.series(kind, id));
  return wanted.map((asked) => {
    const named = [...found].find(([, { window }]) => window.name === asked);
    const gathered = found.get(asked) ?? named?.[1];
    if (gathered === undefined) throw notThere(kind, asked, [...ids]);
    return gathered.series(kind, found.has(asked) ? asked : (named?.[0] ?? asked));
  });
}

/** What the rows of one place tell: the window first, then its steps. */
class Gathered {
  readonly window: Row;
  readonly #plan: FinishedRun["plan"];
  readonly #figure: PlaceSeries["figure"];
  readonly #best: RainSeries;
  readonly #endEpochMs: number;
  readonly #radarMm: Float64Array;
  readonly #p10Mm: Float64Array;
  readonly #p90Mm: Float64Array;

  constructor({ plan, done }: FinishedRun, window: Row) {
    const stepMs = durationMs(plan.intervals.series);
    const startEpochMs = Date.parse(plan.window.from);
    this.#endEpochMs = Date.parse(plan.window.to);
    const count = Math.ceil((this.#endEpochMs - startEpochMs) / stepMs);
    const unknown = () => new Float64Array(count).fill(Number.NaN);
    this.window = window;
    this.#plan = plan;
    // Not by the row: an adjusted depth that was seen to too small a share is left out there.
    this.#figure = typeof done.manifest.headline.adjustmentMethod === "string" ? "adjusted" : "radar";
    this.#best = {
      startEpochMs,
      stepMs,
      depthMm: unknown(),
      observedFraction: new Float64Array(count),
      atCap: new Uint8Array(count),
    };
    [this.#radarMm, this.#p10Mm, this.#p90Mm] = [unknown(), unknown(), unknown()];
  }

  /** Takes a row if it is a step; rain days, which are none, are passed over. */
  add(row: Row): void {
    const { startEpochMs, stepMs, depthMm, observedFraction, atCap } = this.#best;
    const from = Date.parse(row.start ?? "");
    const to = Date.parse(row.end ?? "");
    const isStep = to - from === stepMs || (to - from < stepMs && to === this.#endEpochMs);
    if (!isStep || (from - startEpochMs) % stepMs !== 0) return;
    const step = (from - startEpochMs) / stepMs;
    depthMm[step] = numberOf(row.depth_observed_mm);
    this.#radarMm[step] = numberOf(row.radar_mm);
    this.#p10Mm[step] = numberOf(row.p10_mm);
    this.#p90Mm[step] = numberOf(row.p90_mm);
    observedFraction[step] = numberOf(row.observed_fraction) || 0;
    atCap[step] = isAtCap(row) ? 1 : 0;
  }

  series(kind: StoredKind, id: string): PlaceSeries {
    const { window } = this;
    const known = (cell: string | undefined) => {
      const number = numberOf(cell);
      return Number.isNaN(number) ? null : number;
    };
    const [least, most] = [known(window.min_3x3_mm), known(window.max_3x3_mm)];
    const ends = {
      depthMm: numberOf(window.depth_observed_mm),
      p10Mm: numberOf(window.p10_mm),
      p90Mm: numberOf(window.p90_mm),
    };
    return {
      kind,
      id,
      name: window.name ?? "",
      latDeg: known(window.lat_deg),
      lonDeg: known(window.lon_deg),
      areaKm2: kind === "catchment" ? numberOf(window.area_km2) : this.#plan.grid.cellM ** 2 / 1e6,
      figure: this.#figure,
      from: "tables",
      exact: null,
      best: this.#best,
      radarMm: this.#radarMm,
      rangeOf: storedRange(this.#best, { p10Mm: this.#p10Mm, p90Mm: this.#p90Mm }, ends),
      window: {
        depthMm: known(window.depth_observed_mm),
        radarMm: known(window.radar_mm),
        adjustedMm: known(window.adjusted_mm),
        gaugesOnlyMm: known(window.gauges_only_mm),
        p10Mm: known(window.p10_mm),
        p90Mm: known(window.p90_mm),
        observedFraction: numberOf(window.observed_fraction) || 0,
        atCap: isAtCap(window),
        volumeM3: known(window.volume_m3),
        range3x3: least === null || most === null ? null : { leastMm: least, mostMm: most, cellCount: 9 },
      },
      gauge: undefined,
      notes: [],
    };
  }
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
