import { existsSync, readFileSync } from "node:fs";
import path from "node:path";
import { setImmediate } from "node:timers/promises";
import { InputError, type Interval, type Notice } from "@rainreckon/core";
import {
  formatsReady,
  type MapGuess,
  openGridded,
  recogniseScan,
  sniffMap,
  sniffTable,
  sniffTerrain,
} from "@rainreckon/formats";
import { type Projection, projection } from "@rainreckon/mosaic";
import { sha256Hex } from "../digest.ts";
import { shapefileParts } from "../plan/shapefile-parts.ts";
import { joinChunks, openScans, type ScanPaths } from "../scans/scan-files.ts";
import { type LeftOutLog, leftOutLog } from "../ui/left-out.ts";
import { isoUtc } from "../ui/numbers.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import { fileKind } from "./file-kind.ts";
import type { Findings, GaugeFinding, MapFinding, RadarFinding, TerrainFinding } from "./findings.ts";
import { type GridSource, gridSources, type SeenGrid } from "./grid-sources.ts";
import { gridFindings } from "./grids.ts";
import { possibleTexts } from "./possible.ts";
import { radarFindings, type SeenSweep } from "./radars.ts";
import type { Point, SurveyResult } from "./survey-result.ts";
import {
  readSeenStations,
  readWaterMlPoints,
  type SeenReadings,
  type SeenStations,
  tableFindings,
} from "./tables.ts";
import type { FoundFile, Walk } from "./walk.ts";
import { chooseWindow, commonSpan, wholeSpan } from "./window.ts";

/** What was recognised, file by file. */
interface Seen {
  readonly sweeps: SeenSweep[];
  readonly readings: SeenReadings[];
  readonly stations: SeenStations[];
  readonly maps: { readonly file: string; readonly guess: MapGuess }[];
  readonly grids: SeenGrid[];
  readonly terrain: TerrainFinding[];
  readonly others: Map<string, number>;
}

/**
 * Looks at files and folders: headers of scans, both ends of tables, whole maps.
 *
 * @param paths - as they were given
 * @param walk - the files under them
 */
export async function survey(
  paths: readonly string[],
  walk: Walk,
  terminal: Terminal,
): Promise<SurveyResult> {
  // Faults are findings here: they are printed with the rest, not on the way.
  const wrong = leftOutLog({ ...terminal, note: () => undefined });
  for (const notice of walk.notices) wrong.add("folder left out", notice);
  if (walk.linkCount > 0) {
    const where = paths.join(", ");
    wrong.add(
      "link left out",
      { what: "links are not followed", where, fix: "name what they lead to" },
      walk.linkCount,
    );
  }
  await formatsReady();
  const seen = await lookAt(walk.files, terminal, wrong);
  if (walk.hiddenCount > 0) seen.others.set("hidden", walk.hiddenCount);

  const tell = (kind: string) => (notice: Notice) => wrong.add(kind, notice);
  const { radars } = radarFindings(hashResent(seen.sweeps), tell("radar"));
  const { gauges, stations, points } = tableFindings(seen.readings, seen.stations, radars, tell("gauge"));
  const catchments = seen.maps.map(({ file, guess }) => mapFinding(file, guess, tell("catchment")));
  const catchmentPoints = seen.maps.flatMap(({ file, guess }) => cornersOf(file, guess, tell("catchment")));
  const radarsInWindow = radarsOfOneTime(radars);
  const sources = gridSources(seen.grids, radarsInWindow.size > 0);
  const window = windowOf(radars, radarsInWindow, sources, gauges);
  const part = {
    radars: [...radars],
    gauges: [...gauges],
    stations: [...stations],
    catchments,
    grids: seen.grids.map(({ finding }) => finding),
    terrain: seen.terrain,
    window,
  };
  const findings: Findings = {
    format: "rainreckon-survey-1",
    paths: [...paths],
    fileCount: walk.files.length,
    ...part,
    otherFiles: [...seen.others]
      .map(([kind, count]) => ({ kind, count }))
      .sort((a, b) => b.count - a.count || (a.kind < b.kind ? -1 : 1)),
    wrong: [...wrong.all],
    possible: possibleTexts(part, radarsInWindow, sources),
    next: nextCommand(paths, window !== null),
  };
  return {
    findings,
    files: walk.files,
    radarsInWindow,
    gridSources: sources,
    gaugePoints: points,
    catchmentPoints,
  };
}

const FILES_BETWEEN_BREATHS = 20;

async function lookAt(files: readonly FoundFile[], terminal: Terminal, wrong: LeftOutLog): Promise<Seen> {
  const seen: Seen = {
    sweeps: [],
    readings: [],
    stations: [],
    maps: [],
    grids: [],
    terrain: [],
    others: new Map(),
  };
  const progress = progressBar(terminal, files.length, "files");
  const shapefiles = new Set(
    files.filter(({ path: name }) => /\.shp$/i.test(name)).map(({ path: name }) => name.slice(0, -4)),
  );
  const parts = new Set(files.map(({ path: name }) => name));
  const volumes = joinChunks([...parts], {}, (notice) => wrong.add("chunks", notice));
  for (const [index, file] of volumes.entries()) {
    try {
      if (belongsToShapefile(file.path, shapefiles)) continue;
      await lookAtFile(file, seen, wrong);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      wrong.add("file left out", error);
    } finally {
      progress.advance(file.chunks?.length ?? 1);
    }
    // Opening scans never waits, so an interrupt would go unheard without this.
    if (index % FILES_BETWEEN_BREATHS === 0) await setImmediate();
  }
  progress.end();
  return seen;
}

/** Whether a file is a part of a Shapefile that is read with its .shp. */
function belongsToShapefile(file: string, shapefiles: ReadonlySet<string>): boolean {
  const part = /\.(dbf|shx|prj|cpg|qix|sbn|sbx|shp\.xml)$/i.exec(file)?.[0];
  return part !== undefined && shapefiles.has(file.slice(0, -part.length));
}

async function lookAtFile(volume: ScanPaths, seen: Seen, wrong: LeftOutLog): Promise<void> {
  const { path: file } = volume;
  if (isOwnOutput(file)) {
    wrong.add("file left out", { what: "a result of an earlier run", where: file, fix: "nothing to do" });
    return;
  }
  if (recogniseScan(file) !== undefined) {
    try {
      lookAtScan(volume, seen, wrong);
    } catch (error) {
      // HDF5 and NetCDF may hold a grid just as well; what is wrong with the file as a scan is moot then.
      if (!(error instanceof InputError) || !(await lookAtGrid(file, seen, wrong))) throw error;
    }
    return;
  }
  if (await lookAtGrid(file, seen, wrong)) return;
  const terrain = await sniffTerrain(file);
  if (terrain !== undefined) {
    seen.terrain.push({ file, ...terrain });
    return;
  }
  const map = await sniffMap(file, { parts: shapefileParts(file) });
  if (map !== undefined) {
    seen.maps.push({ file, guess: map });
    return;
  }
  const table = await sniffTable(file);
  if (table.kind === "readings") {
    seen.readings.push({ file, guess: table.readings });
    if (table.readings.layout.value === "waterml2") await lookAtWaterMlPoints(file, seen, wrong);
  } else if (table.kind === "stations") {
    seen.stations.push(
      await readSeenStations(file, table.stations, (notice) => wrong.add("station left out", notice)),
    );
  } else {
    const kind = fileKind(file);
    seen.others.set(kind, (seen.others.get(kind) ?? 0) + 1);
    if (path.extname(file).toLowerCase() === ".csv") {
      wrong.add("file left out", { what: table.reason, where: file, fix: "mend the table, or leave it out" });
    }
  }
}

function lookAtScan(volume: ScanPaths, seen: Seen, wrong: LeftOutLog): void {
  const scan = openScans(volume);
  try {
    const { chunks } = volume;
    for (const header of scan.headers)
      seen.sweeps.push({ header, format: scan.format, ...(chunks === undefined ? {} : { chunks }) });
    for (const fault of scan.leftOut) wrong.add("sweep left out", fault);
    for (const remark of scan.remarks) wrong.add("scan", remark);
  } finally {
    scan.close();
  }
}

const OWN_OUTPUTS = new Set([
  "totals.nc",
  "learned.nc",
  "radar_total.tif",
  "adjusted_total.tif",
  "rain_rate.tif",
  "isohyets.geojson",
  "catchments.csv",
  "pairs.csv",
  "gauges.csv",
]);

/** Totals are never made of totals, nor checked by them, even where a run lies among its own input. */
function isOwnOutput(file: string): boolean {
  const beside = ["manifest.json", "rate.json"].map((name) => path.join(path.dirname(file), name));
  return OWN_OUTPUTS.has(path.basename(file)) && beside.some((name) => existsSync(name));
}

/** @returns false where the file holds no gridded rain or reflectivity */
async function lookAtGrid(file: string, seen: Seen, wrong: LeftOutLog): Promise<boolean> {
  const grid = await openGridded(file);
  if (grid === undefined) return false;
  try {
    seen.grids.push(...gridFindings(file, grid));
    for (const fault of grid.leftOut) wrong.add("layer left out", fault);
    for (const remark of grid.remarks) wrong.add("layer", remark);
  } finally {
    grid.close();
  }
  return true;
}

/** The monitoring points of a WaterML file: where they have positions, they need no table of stations. */
async function lookAtWaterMlPoints(file: string, seen: Seen, wrong: LeftOutLog): Promise<void> {
  try {
    seen.stations.push(await readWaterMlPoints(file, (notice) => wrong.add("station left out", notice)));
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    wrong.add("station left out", error);
  }
}

/** Reads the files that hold one instant twice, to tell a copy from a correction. */
function hashResent(sweeps: readonly SeenSweep[]): SeenSweep[] {
  const key = ({ header }: SeenSweep) =>
    `${header.site.id} ${header.startEpochMs} ${header.elevationDeg.toFixed(1)}`;
  const counts = new Map<string, number>();
  for (const sweep of sweeps) counts.set(key(sweep), (counts.get(key(sweep)) ?? 0) + 1);
  const hashes = new Map<string, string>();
  const hashOf = (file: string) => {
    const known = hashes.get(file) ?? sha256Hex(readFileSync(file));
    hashes.set(file, known);
    return known;
  };
  return sweeps.map((sweep) =>
    counts.get(key(sweep)) === 1 ? sweep : { ...sweep, contentHash: hashOf(sweep.header.origin.path) },
  );
}

function spanOf(radar: RadarFinding): Interval {
  return { startEpochMs: Date.parse(radar.firstStart), endEpochMs: Date.parse(radar.lastEnd) };
}

/** The radar with most rounds, and those whose time meets its time; nobody with a single round. */
function radarsOfOneTime(radars: readonly RadarFinding[]): ReadonlySet<string> {
  const able = radars.filter((radar) => radar.roundCount >= 2);
  const leader = [...able].sort((a, b) => b.roundCount - a.roundCount)[0];
  if (leader === undefined) return new Set();
  return new Set(
    able.filter((radar) => commonSpan(spanOf(radar), spanOf(leader)) !== undefined).map((radar) => radar.id),
  );
}

function windowOf(
  radars: readonly RadarFinding[],
  inWindow: ReadonlySet<string>,
  sources: readonly GridSource[],
  gauges: readonly GaugeFinding[],
): Findings["window"] {
  const used = radars.filter((radar) => inWindow.has(radar.id));
  const grids = sources.filter((source) => source.inWindow);
  const span = wholeSpan(used.length > 0 ? used.map(spanOf) : grids.flatMap(({ spans }) => spans));
  if (span === undefined) return null;
  const gaugeSpan = wholeSpan(
    gauges.flatMap(({ firstStamp, lastStamp, stepMinutes, stationsFile }) => {
      if (firstStamp === null || lastStamp === null || stationsFile === undefined) return [];
      // The first stamp ends a reading, which began a step earlier.
      const startEpochMs = Date.parse(firstStamp) - (stepMinutes?.value ?? 0) * 60_000;
      return [{ startEpochMs, endEpochMs: Date.parse(lastStamp) }];
    }),
  );
  // Depths begin and end where they say; instants may lie a little beside a whole hour.
  const instants = grids.filter(({ quantity }) => quantity !== "depth");
  const steps = [
    ...used.map(({ medianRoundMinutes }) => medianRoundMinutes),
    ...instants.map(({ stepMinutes }) => stepMinutes),
  ];
  const roundMs = Math.max(0, ...steps.map((minutes) => (minutes ?? 0) * 60_000));
  const { window, basis } = chooseWindow(span, gaugeSpan, roundMs);
  const source = used.length > 0 ? "radars" : "grids";
  return {
    from: isoUtc(window.startEpochMs),
    to: isoUtc(window.endEpochMs),
    basis: basis === "radars" ? source : `${source} and gauges`,
  };
}

function mapFinding(file: string, guess: MapGuess, onNotice: (notice: Notice) => void): MapFinding {
  const [id] = guess.idFields;
  const name = guess.nameFields.find((field) => field !== id);
  if (guess.polygonCount < guess.featureCount) {
    onNotice({
      what: `${guess.featureCount - guess.polygonCount} of ${guess.featureCount} features are no areas`,
      where: file,
      fix: "nothing to do, if that is right; only polygons become catchments",
    });
  }
  if (id === undefined) {
    onNotice({
      what: "no property tells the areas apart",
      where: file,
      fix: "give every area an id of its own",
    });
  }
  if (!guess.crsKnown && guess.polygonCount > 0) {
    onNotice({
      what: "nothing says what system the coordinates are in",
      where: file,
      fix:
        guess.format === "Shapefile"
          ? "put its .prj beside it, or write catchments.crs in the plan"
          : "write catchments.crs in the plan",
    });
  }
  if (guess.layers !== undefined && guess.layers.length > 1) {
    onNotice({
      what: `it holds several layers of areas: ${guess.layers.join(", ")}; ${guess.layer} was looked at`,
      where: file,
      fix: "write catchments.layer in the plan",
    });
  }
  return {
    file,
    format: guess.format,
    ...(guess.layer === undefined ? {} : { layer: guess.layer }),
    ...(guess.layers === undefined ? {} : { layers: [...guess.layers] }),
    polygonCount: guess.polygonCount,
    ...(id === undefined
      ? {}
      : {
          idField: {
            value: id,
            standing: "guessed" as const,
            reason: "filled in and different for each area",
          },
        }),
    ...(name === undefined
      ? {}
      : { nameField: { value: name, standing: "guessed" as const, reason: "it holds words" } }),
    ...(guess.crs === undefined ? {} : { crs: guess.crs }),
    crsKnown: guess.crsKnown,
  };
}

function cornersOf(file: string, guess: MapGuess, onNotice: (notice: Notice) => void): Point[] {
  if (guess.bounds === undefined || guess.polygonCount === 0 || !guess.crsKnown) return [];
  const [west, south, east, north] = guess.bounds;
  let map: Projection;
  try {
    map = projection(guess.crs ?? "EPSG:4326");
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    onNotice({ what: error.what, where: file, fix: error.fix });
    return [];
  }
  const corners = [
    [west, south],
    [west, north],
    [east, south],
    [east, north],
  ] as const;
  return corners.map(([x, y]) => {
    const [lonDeg, latDeg] = map.geographic ? [x, y] : map.inverse(x, y);
    return { lonDeg, latDeg };
  });
}

function nextCommand(paths: readonly string[], possible: boolean): string {
  const words = paths.map(shellWord).join(" ");
  return possible
    ? `rainreckon plan ${words} -o plan.yaml`
    : `rainreckon survey ${words} (again, once there are scans of two rounds and more, or gridded rain)`;
}

/** A path as a shell takes it for one word. */
function shellWord(text: string): string {
  return /^[\w./@%+,:=-]+$/.test(text) ? text : `'${text.replaceAll("'", "'\\''")}'`;
}
