import path from "node:path";
import { durationMs, USUAL_DURATIONS_MS } from "@rainreckon/accumulation";
import type { FrequencyTable } from "@rainreckon/core";
import { InputError } from "@rainreckon/core";
import { readArealReduction, readFrequencyTable, sha256OfFile } from "@rainreckon/formats";
import { DateTime } from "luxon";
import type { LonLat } from "../explain/places-asked.ts";
import { type FinishedRun, finishedRun } from "../export/finished-run.ts";
import type { Plan } from "../plan/schema.ts";
import { type PlacedAsset, readAssets } from "../total/assets.ts";
import { STANDING_CAUTIONS } from "../total/cautions.ts";
import { leftOutLog } from "../ui/left-out.ts";
import { counted, isoUtc, lengthText } from "../ui/numbers.ts";
import type { Terminal } from "../ui/terminal.ts";
import { areaDurationOf } from "./area-duration.ts";
import { exceedancesOf } from "./exceedances.ts";
import { type Frequency, tableWords } from "./frequency-told.ts";
import { type AccountAsked, placeAccount } from "./place-account.ts";
import type { PlaceSeries } from "./place-series.ts";
import { placesAsked, remadeSeries } from "./remade-series.ts";
import { ruleOf } from "./rule.ts";
import { gridSeries, openRunGrid, type RunGrid } from "./run-grid.ts";
import type { EventReport } from "./schema.ts";
import { storedSeries } from "./stored-series.ts";

const MINUTE_MS = 60_000;

/** What `event` is asked. */
export interface EventAsked {
  readonly catchments: readonly string[];
  readonly assets: readonly string[];
  readonly gauges: readonly string[];
  readonly points: readonly LonLat[];
  /** A table of points of its own: id, name, lon, lat. */
  readonly assetsFile: string | undefined;
  readonly frequencyFile: string | undefined;
  readonly arealReductionFile: string | undefined;
  readonly shownAs: "AMS" | "PDS" | undefined;
  readonly dryTimeMs: number | undefined;
  readonly thresholdMm: number | undefined;
  /** Ascending; the usual ones where left out. */
  readonly durationsMs: readonly number[] | undefined;
  readonly clockAligned: boolean;
  /** Takes depths of points from the stored grid, instead of making the run again. */
  readonly fromGrid: boolean;
  readonly plan: string | undefined;
}

/** What a report was made from, for who writes more of it. */
export interface EventOutcome {
  readonly report: EventReport;
  readonly series: readonly PlaceSeries[];
  readonly frequency: Frequency | undefined;
  readonly run: FinishedRun;
}

/**
 * Events, largest depths by duration, and return periods at places of a finished run.
 *
 * Catchments and assets of the plan are read from the tables of the run. Other places have no steps there, and the run
 * is made again for them: the grid holds intervals of an hour as a rule, and what floods a sewer is over before.
 *
 * @throws InputError (kind "usage") where the run, a place or a table is not what it must be
 */
export async function eventsOfRun(
  folder: string,
  asked: EventAsked,
  terminal: Terminal,
): Promise<EventOutcome> {
  const run = finishedRun(folder);
  const { plan, done } = run;
  const window = { startEpochMs: Date.parse(plan.window.from), endEpochMs: Date.parse(plan.window.to) };
  const frequency = await frequencyOf(asked);
  const chosen = ruleOf(plan, asked);
  const durationsMs = asked.durationsMs ?? USUAL_DURATIONS_MS;
  const grid = await openRunGrid(run, asked.fromGrid);
  const { series, remarks } = await seriesAsked(run, grid, asked, terminal);
  if (series.length === 0) {
    throw new InputError(
      "no place is left to be told of",
      folder,
      'name one with --at "51.20N 4.10E", --gauge, --catchment or --assets FILE',
      { kind: "usage" },
    );
  }
  const account: AccountAsked = {
    rule: chosen.rule,
    durationsMs,
    clockAnchorEpochMs: asked.clockAligned ? clockAnchor(plan) : undefined,
    frequency: frequency?.frequency,
  };
  const places = series.map((place) => placeAccount(place, account));
  const { headline } = done.manifest;
  const report: EventReport = {
    format: "rainreckon-event-1",
    run: {
      folder,
      title: done.manifest.title,
      status: done.manifest.status,
      version: done.manifest.version,
      runDigest: done.manifest.runDigest,
    },
    window: { start: isoUtc(window.startEpochMs), end: isoUtc(window.endEpochMs), zone: plan.window.zone },
    rule: {
      dryMinutes: chosen.rule.dryTimeMs / MINUTE_MS,
      minDepthMm: chosen.rule.minDepthMm,
      wetMmPerHour: chosen.rule.wetMmPerHour,
      whose: chosen.whose,
      words: chosen.words,
    },
    durations: {
      minutes: durationsMs.map((ms) => ms / MINUTE_MS),
      clockAligned: asked.clockAligned,
      words: durationWords(plan, asked.clockAligned),
    },
    frequency: frequency?.told ?? null,
    places,
    exceedances:
      frequency !== undefined && places.length > 1 ? exceedancesOf(places, frequency.frequency) : null,
    areaDuration: areaDurationOf(grid, durationsMs),
    cautions: [
      ...remarks,
      ...(frequency === undefined || places.every(({ window: { p10Mm } }) => p10Mm !== null)
        ? []
        : [
            "The run gives no interval of these depths, so the periods have none either: they are less sure than two figures look.",
          ]),
      ...(frequency === undefined
        ? []
        : [
            "Each duration has a return period of its own. Who picks the largest makes the rain look rarer than it was.",
            "A return period of one radar cell or catchment says nothing of how often such rain falls somewhere in the district.",
          ]),
      ...cautionsOf(headline),
    ],
  };
  return { report, series, frequency: frequency?.frequency, run };
}

/** Those of the run, and the standing ones. */
function cautionsOf(headline: Readonly<Record<string, unknown>>): string[] {
  const said = Array.isArray(headline.cautions) ? headline.cautions.map(String) : [];
  return [
    ...new Set([
      ...said,
      ...STANDING_CAUTIONS,
      "Return periods do not replace official warnings, local codes or the judgement of a licensed practitioner.",
    ]),
  ];
}

async function frequencyOf(
  asked: EventAsked,
): Promise<
  { readonly frequency: Frequency; readonly told: NonNullable<EventReport["frequency"]> } | undefined
> {
  const { frequencyFile, arealReductionFile, shownAs } = asked;
  if (frequencyFile === undefined) {
    if (arealReductionFile === undefined && shownAs === undefined) return undefined;
    throw new InputError(
      "there is no table of return periods that this could be applied to",
      arealReductionFile === undefined ? "--as-series" : "--areal-reduction",
      "add --frequency FILE",
      { kind: "usage" },
    );
  }
  const table = await asUsage(readFrequencyTable(frequencyFile));
  const reductions =
    arealReductionFile === undefined ? undefined : await asUsage(readArealReduction(arealReductionFile));
  if (table.series === "unknown" && shownAs !== undefined) {
    throw new InputError(
      "the table does not say which series its periods are of, so they cannot be converted",
      frequencyFile,
      'write "# series: AMS" or "# series: PDS" above its header',
      { kind: "usage" },
    );
  }
  const frequency: Frequency = { table, shownAs: shownAs ?? table.series, arealReduction: reductions };
  return { frequency, told: await frequencyTold(frequency, frequencyFile, arealReductionFile) };
}

async function frequencyTold(
  frequency: Frequency,
  file: string,
  reductionFile: string | undefined,
): Promise<NonNullable<EventReport["frequency"]>> {
  const { table, shownAs, arealReduction } = frequency;
  const ends = (values: FrequencyTable["durationsMin"]) => [values[0], values[values.length - 1]] as const;
  const [leastMinutes, mostMinutes] = ends(table.durationsMin);
  const [leastYears, mostYears] = ends(table.periodsYears);
  return {
    file,
    sha256: await sha256OfFile(file),
    series: table.series,
    shownAs,
    kind: table.kind,
    areaKm2: table.areaKm2 ?? null,
    source: table.source,
    edition: table.edition,
    leastMinutes,
    mostMinutes,
    leastYears,
    mostYears,
    arealReduction:
      reductionFile === undefined || arealReduction === undefined
        ? null
        : { file: reductionFile, sha256: await sha256OfFile(reductionFile), source: arealReduction.source },
    words: tableWords(frequency),
  };
}

/** A table that the command line names is part of its usage. */
async function asUsage<T>(reading: Promise<T>): Promise<T> {
  try {
    return await reading;
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    throw new InputError(error.what, error.where, error.fix, { kind: "usage", cause: error });
  }
}

/** All places that are asked for, in the order of the flags; all that the run holds where none is. */
async function seriesAsked(
  run: FinishedRun,
  grid: RunGrid,
  asked: EventAsked,
  terminal: Terminal,
): Promise<{ readonly series: PlaceSeries[]; readonly remarks: readonly string[] }> {
  const { points, gauges, assetsFile } = asked;
  const named = asked.catchments.length + asked.assets.length + points.length + gauges.length;
  // A table of points of its own takes the place of the plan's; with --asset, one point of it.
  const fromFile = assetsFile === undefined ? undefined : await fileAssets(assetsFile, grid, terminal);
  const ofFile = fromFile?.filter(({ id }) => asked.assets.length === 0 || asked.assets.includes(id));
  if (ofFile !== undefined && ofFile.length < asked.assets.length)
    throw new InputError("an asset asked for is not in this table", assetsFile as string, "check its id", {
      kind: "usage",
    });
  const all = named === 0 && fromFile === undefined;
  const stored = [
    ...(await storedSeries(run, "catchment", all ? "all" : asked.catchments)),
    ...(await storedSeries(run, "asset", all ? "all" : fromFile === undefined ? asked.assets : [])),
  ];
  const count = (ofFile?.length ?? 0) + points.length + gauges.length;
  if (count === 0) return { series: stored, remarks: [] };
  if (asked.fromGrid) {
    if (gauges.length > 0)
      throw new InputError(
        "where a gauge stands is known to a run that is made again",
        "--gauge with --from-grid",
        "leave --from-grid out, or name the place with --at",
        { kind: "usage" },
      );
    const own = [...(ofFile ?? []).map(asAsset), ...points.map((point) => pointOn(grid, point))];
    return { series: [...stored, ...own.map((place) => gridSeries(grid, place))], remarks: [] };
  }
  terminal.note(
    `${counted(count, "place")} of which the run holds no steps: it is made again, which takes as long as it did on one processor (--from-grid does without, from ${lengthText(durationMs(run.plan.intervals.grids))} on)`,
  );
  const { places, remarks } = await remadeSeries(
    run.folder,
    asked.plan,
    async (prepared) => [
      ...(ofFile ?? []).map((asset) => ({ ...asAsset(asset), gauge: undefined })),
      ...placesAsked(prepared, { points, gauges }),
    ],
    terminal,
  );
  return { series: [...stored, ...places], remarks };
}

const asAsset = (asset: PlacedAsset) => ({ ...asset, kind: "asset" as const });

function pointOn({ grid, map }: RunGrid, point: LonLat): PlacedAsset & { readonly kind: "point" } {
  const nothingElse = { gauges: { gauges: [], counts: [] }, catchments: [] };
  const [place] = placesAsked({ grid, map, ...nothingElse }, { points: [point], gauges: [] });
  return { ...(place as PlacedAsset), kind: "point" };
}

/** Points of a table that the command line names; those outside the grid are left out, and said. */
async function fileAssets(file: string, grid: RunGrid, terminal: Terminal): Promise<PlacedAsset[]> {
  const log = leftOutLog(terminal);
  const table = {
    columns: { id: "id", name: "name", x: "lon", y: "lat" },
    crs: "EPSG:4326",
  };
  try {
    return await asUsage(
      readAssets(path.resolve(file), table, grid.grid, grid.map, (notice) =>
        log.add("assets", { ...notice, where: notice.where.replace(path.resolve(file), file) }),
      ),
    );
  } finally {
    log.finish();
  }
}

/** Midnight on the clock of the plan's zone, or the hour at which its rain days begin. */
function clockAnchor({ window, intervals: { rainDay } }: Plan): number {
  const zone = rainDay?.zone ?? window.zone;
  return DateTime.fromISO(window.from, { zone })
    .startOf("day")
    .set({ hour: rainDay?.hour ?? 0 })
    .toMillis();
}

function durationWords(plan: Plan, clockAligned: boolean): string {
  const step = lengthText(durationMs(plan.intervals.series));
  return clockAligned
    ? `Windows begin at whole multiples of the duration, counted from ${plan.intervals.rainDay === undefined ? "midnight" : "the begin of the rain day"} on the clock of ${plan.intervals.rainDay?.zone ?? plan.window.zone}. Maxima of clock-fixed windows fall short of sliding ones, over many years by a factor of 1.14 on average (Weiss 1964, from memory: n / (n - 1/8) with n = 1; Hershfield 1961, from memory: 1.13). It is not applied: for one event it lies between 1 and 2.`
    : `Windows slide by steps of ${step}. Maxima of steps fall short of those that begin at any instant, over many years by a factor of n / (n - 1/8) on average for n steps (Weiss 1964, from memory): ${step} 1.14, twice that 1.07, twelve times 1.01. It is not applied to an event.`;
}
