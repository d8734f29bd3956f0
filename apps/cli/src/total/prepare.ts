import { existsSync } from "node:fs";
import path from "node:path";
import { type CellFractions, cutWindow, durationMs } from "@rainreckon/accumulation";
import {
  findRelation,
  type Grid,
  InputError,
  type Interval,
  midEpochMs,
  NOTHING_LEARNED,
  type Notice,
  type OverlapDifference,
  type ZrRelation,
} from "@rainreckon/core";
import { readCatchments } from "@rainreckon/formats";
import { type Projection, projection } from "@rainreckon/mosaic";
import { canonicalJson, sha256Hex } from "../digest.ts";
import type { ManifestInput } from "../manifest.ts";
import type { LoadedPlan } from "../plan/load.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import type { Progress } from "../ui/progress.ts";
import { version } from "../version.ts";
import { assetsOf, type PlacedAsset } from "./assets.ts";
import { relationWasNotChosen } from "./cautions.ts";
import { conversionOf } from "./conversion.ts";
import { echoSettings, rateSettings } from "./echo-settings.ts";
import { fieldCells } from "./field-places.ts";
import { type GaugeInputs, readGauges } from "./gauges.ts";
import { type GridInput, indexGrids } from "./grid-inputs.ts";
import { hashFile, indexScans, type RadarInput } from "./inputs.ts";
import type { JobRadar, JobRound, JobSensitivity, RunShape, UnitJob } from "./job.ts";
import { type PlacedCatchment, placeCatchments, unionOfAreas, wholeGrid } from "./places.ts";
import { learnSensitivity } from "./sensitivity.ts";
import { cutIntoUnits } from "./units.ts";

/** All that a run needs before the first scan is decoded. */
export interface PreparedRun {
  readonly loaded: LoadedPlan;
  readonly window: Interval;
  readonly stepMs: number;
  readonly intervals: readonly Interval[];
  readonly steps: readonly Interval[];
  readonly grid: Grid;
  readonly map: Projection;
  readonly radars: readonly RadarInput[];
  readonly gauges: GaugeInputs;
  readonly catchments: readonly PlacedCatchment[];
  readonly assets: readonly PlacedAsset[];
  /** What the headline speaks of: all catchments together, or the whole grid. */
  readonly district: CellFractions;
  readonly headlineRelations: readonly { readonly name: string; readonly relation: ZrRelation }[];
  readonly shape: RunShape;
  readonly jobs: readonly UnitJob[];
  /** How radars compare in the same rain; known once the run has learned. */
  readonly overlaps: readonly OverlapDifference[];
  readonly inputs: readonly ManifestInput[];
  /** SHA-256 of plan, inputs, program and what was said of them: the same digest means the same bytes. */
  readonly runDigest: string;
}

/**
 * Reads and sorts everything that a plan names, and cuts the run into units of work.
 *
 * @throws InputError (no-input) when no usable scan is left, or each radar has but one instant
 */
export async function prepareRun(
  loaded: LoadedPlan,
  log: LeftOutLog,
  progressOf: (total: number, noun: string) => Progress,
): Promise<PreparedRun> {
  const { plan } = loaded;
  const window: Interval = {
    startEpochMs: Date.parse(plan.window.from),
    endEpochMs: Date.parse(plan.window.to),
  };
  const stepMs = durationMs(plan.intervals.series);
  const anchor = window.startEpochMs % stepMs;
  const intervals = cutWindow(window, durationMs(plan.intervals.grids), anchor);
  const steps = cutWindow(window, stepMs, anchor);
  const grid: Grid = plan.grid;
  const map = gridMap(grid);

  const inputs: ManifestInput[] = [];
  const seen = (input: ManifestInput) => inputs.push(input);
  const indexing = progressOf(loaded.scanFiles.length, "scans");
  const radars = await indexScans(loaded, log, seen, indexing);
  indexing.end();
  const grids = await indexGrids(loaded, log, seen, (count) => progressOf(count, "grids"));
  refuseSingleInstants(radars, grids, plan.window);
  const sites = radars.map(({ sweeps }) => sweeps[0].header.site);
  const gauges = await readGauges(loaded, grid, map, window, sites, log, seen);
  const catchments = await catchmentsOf(loaded, grid, map, log, seen);
  const assets = await assetsOf(loaded, grid, map, steps.length, log, seen);
  await hashTerrain(loaded, log, seen);
  const district = catchments.length > 0 ? unionOfAreas(catchments, grid) : wholeGrid(grid);
  const headlineRelations = plan.rain.headlineRelations.map((name) => ({
    name,
    relation: findRelation(name),
  }));

  const jobRadars: JobRadar[] = [];
  for (const radar of radars) {
    const sensitivity = await learnSensitivity(radar, (notice) => log.add("doubted", notice));
    jobRadars.push(jobRadar(radar, loaded, sensitivity, log));
  }
  const shape: RunShape = {
    grid,
    radars: jobRadars,
    grids: grids.map(({ source }) => source),
    variants: headlineRelations.map(({ relation }) => relation),
    headlineCells: district.cells,
    gaugeCells: gauges.gauges.map((gauge) => gauge.cells),
    fieldCells: fieldCells(grid, gauges.gauges.length, steps.length),
    areas: [...catchments, ...assets].map(({ cells }) => cells),
  };
  const sorted = inputs.toSorted((a, b) => (a.path < b.path ? -1 : a.path > b.path ? 1 : 0));
  const runDigest = sha256Hex(
    canonicalJson({
      version: version(),
      node: process.versions.node.split(".")[0],
      plan,
      inputs: sorted.map(({ path: name, sha256 }) => [name, sha256]),
      // Both stand in the outputs, and neither follows from the rest: a mark is a comment of the plan, and a
      // file that cannot be opened has no SHA-256.
      relationNotChosen: relationWasNotChosen(loaded.text),
      notices: log.all,
    }),
  );
  return {
    loaded,
    window,
    stepMs,
    intervals,
    steps,
    grid,
    map,
    radars,
    gauges,
    catchments,
    assets,
    district,
    headlineRelations,
    shape,
    jobs: cutIntoUnits(intervals, stepMs, [...shape.radars, ...shape.grids]),
    overlaps: [],
    inputs: sorted,
    runDigest,
  };
}

/**
 * The projection of the plan's grid.
 *
 * @throws InputError (usage) where its coordinate system is unknown, or puts the grid nowhere on Earth: such
 * a grid would hold nothing, and every gauge would lie outside it
 */
export function gridMap({ crs, westM, northM, cellM, nx, ny }: Grid): Projection {
  const where = `plan, grid.crs: ${crs}`;
  let map: Projection;
  try {
    map = projection(crs);
  } catch (cause) {
    if (!(cause instanceof InputError)) throw cause;
    throw new InputError(cause.what, where, cause.fix, { kind: "usage", cause });
  }
  if (/\+units=(?!m\b)|\+to_meter=/.test(map.projString))
    throw new InputError(
      "this system does not count in metres",
      where,
      "choose a projected system in metres",
      {
        kind: "usage",
      },
    );
  const [lonDeg, latDeg] = map.inverse(westM + (nx * cellM) / 2, northM - (ny * cellM) / 2);
  if (Number.isFinite(lonDeg) && Number.isFinite(latDeg)) return map;
  throw new InputError(
    "the middle of the grid is no place on Earth",
    where,
    "check crs, westM and northM, or write a new plan",
    { kind: "usage" },
  );
}

/** One instant of a radar or a grid is a rate, and no number of minutes can be made of it. */
function refuseSingleInstants(
  radars: readonly RadarInput[],
  grids: readonly GridInput[],
  window: { from: string; to: string },
): void {
  if (radars.some(({ roundsInReach }) => roundsInReach > 1)) return;
  if (grids.some(({ layersInReach, source }) => layersInReach > (source.quantity === "depthMm" ? 0 : 1)))
    return;
  if (radars.length === 0 && grids.every(({ layersInReach }) => layersInReach === 0)) {
    throw new InputError(
      "nothing usable lies in the window",
      `grids ${grids.map(({ source }) => source.id).join(", ")}, window ${window.from} to ${window.to}`,
      "see the lines above, or run survey on the files",
      { kind: "no-input" },
    );
  }
  const sources = [
    ...(radars.length > 0 ? [`radars ${radars.map(({ radar }) => radar.id).join(", ")}`] : []),
    ...(grids.length > 0 ? [`grids ${grids.map(({ source }) => source.id).join(", ")}`] : []),
  ].join(", ");
  throw new InputError(
    "one instant per site is a rate, not a total",
    `${sources}, window ${window.from} to ${window.to}`,
    "add the scans before or after it: a total needs at least two rounds of one radar; or add --rate for a map of rain rate",
    { kind: "no-input" },
  );
}

/** The terrain model is an input like any other; the learning before the units reads it. */
async function hashTerrain(
  { folder, terrainFile }: LoadedPlan,
  log: LeftOutLog,
  seen: (input: ManifestInput) => void,
): Promise<void> {
  if (terrainFile === undefined) return;
  try {
    const { name, sha256, bytes } = await hashFile(folder, terrainFile);
    seen({ path: name, kind: "terrain", sha256, bytes, use: "used" });
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    log.add("terrain left out", error);
  }
}

/** Catchments of the plan on its grid; what is wrong with one goes to the log. */
export async function catchmentsOf(
  loaded: LoadedPlan,
  grid: Grid,
  map: Projection,
  log: LeftOutLog,
  seen: (input: ManifestInput) => void,
): Promise<PlacedCatchment[]> {
  const { plan, catchmentsFile } = loaded;
  if (catchmentsFile === undefined || plan.catchments === undefined) return [];
  const relative = (text: string) => text.replaceAll(`${loaded.folder}${path.sep}`, "");
  const onNotice = (notice: Notice) =>
    log.add("catchment left out", { ...notice, where: relative(notice.where) });
  let use: ManifestInput["use"] = "left out";
  let placed: PlacedCatchment[] = [];
  try {
    const fields = { ...plan.catchments, parts: loaded.catchmentsParts };
    const read = await readCatchments(catchmentsFile, fields, onNotice);
    placed = placeCatchments(read, grid, map, plan.catchments.file, log);
    use = "used";
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    log.add("catchments left out", { what: error.what, where: relative(error.where), fix: error.fix });
  }
  const { dbf, prj, cpg } = loaded.catchmentsParts;
  for (const file of [catchmentsFile, dbf, prj, cpg]) {
    if (file === undefined || !existsSync(file)) continue;
    const { name, sha256, bytes } = await hashFile(loaded.folder, file);
    seen({ path: name, kind: "catchments", sha256, bytes, use });
  }
  return placed;
}

/** What a unit of work needs of a radar; what is doubtful about its relation or cap goes to the log. */
export function jobRadar(
  { radar, rounds, sweepOf, beamWidthDeg }: RadarInput,
  loaded: LoadedPlan,
  sensitivity: JobSensitivity | undefined,
  log: LeftOutLog,
): JobRadar {
  const { plan } = loaded;
  const site = rounds[0].sweeps[0].site;
  const jobRounds = rounds.map((round, k): JobRound => {
    const sweeps = round.sweeps
      .map((header) => {
        const indexed = sweepOf.get(header);
        if (indexed === undefined) throw new RangeError("a round holds a sweep that was not indexed");
        const { file, index, path, chunks } = indexed;
        return {
          path,
          ...(chunks === undefined ? {} : { chunks }),
          name: file.name,
          index,
          elevationDeg: header.elevationDeg,
          midEpochMs: midEpochMs(header),
        };
      })
      .toSorted((a, b) => a.elevationDeg - b.elevationDeg || a.midEpochMs - b.midEpochMs);
    const mids = sweeps.map((sweep) => sweep.midEpochMs);
    return {
      sweeps,
      firstMidEpochMs: Math.min(...mids),
      lastMidEpochMs: Math.max(...mids),
      isFirst: k === 0,
      isLast: k === rounds.length - 1,
    };
  });
  const job: Omit<JobRadar, "echo"> = {
    ...conversionOf({ ...radar, minRateMmPerHour: plan.rain.minRateMmPerHour }, `radar ${radar.id}`, log),
    site,
    beamWidthDeg,
    wavelengthM:
      radar.wavelengthCm === undefined
        ? rounds[0].sweeps.find(({ wavelengthM }) => wavelengthM !== undefined)?.wavelengthM
        : radar.wavelengthCm / 100,
    sensitivity,
    time: {
      medianRoundMs: radar.medianRoundMinutes * 60_000,
      // Whole milliseconds: 4.35 minutes in binary are a hair short of 261 s, and equality bridges.
      maxGapMs: Math.round(radar.maxGapMinutes * 60_000),
    },
    lookup: {
      effectiveRadiusFactor: plan.rain.effectiveRadiusFactor,
      maxBeamHeightM: radar.maxBeamHeightM,
      taperM: plan.rain.taperKm * 1000,
      blockedSectors: radar.blockedSectors,
    },
    rounds: jobRounds,
  };
  const settings = echoSettings(plan, radar, job, sensitivity);
  return {
    ...job,
    echo:
      settings === undefined
        ? undefined
        : {
            settings,
            learned: NOTHING_LEARNED,
            rainType: plan.echo.rate.rainType,
            rate: rateSettings(plan),
          },
  };
}
