import { existsSync, renameSync, rmSync, statSync } from "node:fs";
import path from "node:path";
import { cellCentre, InputError } from "@rainreckon/core";
import {
  type ArchiveEntry,
  type CsvColumn,
  csvText,
  displayText,
  type JsonValue,
  sha256OfFile,
  toJson,
  writeTarGz,
} from "@rainreckon/formats";
import { sha256Hex } from "../digest.ts";
import { explainRun } from "../explain/explain.ts";
import { explainText } from "../explain/explain-text.ts";
import { checkedOutput, openRun } from "../explain/open-run.ts";
import { gaugeName } from "../explain/places-asked.ts";
import type { Explanation } from "../explain/schema.ts";
import { changedSettings } from "../total/changed-settings.ts";
import type { PreparedRun } from "../total/prepare.ts";
import { MANIFEST, RUN_LOG } from "../total/run-folder.ts";
import { counted, isoUtc } from "../ui/numbers.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import { version } from "../version.ts";
import { bundledInputs } from "./bundle-inputs.ts";
import { bundleReadme } from "./bundle-readme.ts";
import { type BundleFigure, bundleFigureSchema } from "./bundle-schema.ts";
import { defaultFigure } from "./default-figure.ts";
import type { EventAsked, EventOutcome } from "./event.ts";
import { eventText } from "./event-text.ts";
import { eventPage } from "./pages.ts";
import type { PlaceSeries } from "./place-series.ts";
import type { EventReport, PlaceReport } from "./schema.ts";

export interface BundleAsked {
  readonly file: string;
  readonly licences: readonly string[];
  readonly preparedBy: string | undefined;
}

/**
 * Packs all that stands behind the figure of one place: plan, inputs and outputs of the run, the account of the figure
 * scan by scan, and the commands that make it again from nothing else. All inputs are in it, for all have part in the
 * figure: what is learned of the radars and the adjustment rest on every scan and gauge.
 *
 * @throws InputError (kind "usage") where not exactly one place was asked for, the file is there already, or an input of
 * the run is missing or was changed
 */
export async function writeBundle(
  outcome: EventOutcome,
  asked: EventAsked,
  { file, licences, preparedBy }: BundleAsked,
  terminal: Terminal,
): Promise<void> {
  const { report, run: finished } = outcome;
  const { folder, done } = finished;
  const place = onePlace(report);
  const series = outcome.series[0] as PlaceSeries;
  if (existsSync(file)) throw usage("this file is there already", file, "choose another name for the bundle");
  const opened = await openRun(folder, asked.plan, terminal, (count, noun) =>
    progressBar(terminal, count, noun),
  );
  const { run } = opened;
  const { manifest } = done;
  const top = path.basename(file).replace(/\.(tar\.gz|tgz)$/i, "");
  const inputs = bundledInputs(run.loaded, manifest.inputs, "inputs");
  const explanation = await explainRun(
    folder,
    { asked: explainAsked(place, series), plan: run.loaded.path, from: undefined, to: undefined },
    terminal,
  );
  const tables = tablesOf(asked);
  const packed = packedReport(report, tables);
  const changed = changedSettings(run.loaded.plan);
  const standard = changed.length === 0 && run.loaded.plan.overrides.length === 0;
  const byDefault = standard
    ? { bestMm: place.window.depthMm, radarMm: place.window.radarMm }
    : await defaultFigure(opened, place, terminal);
  const account = [...explanation.points, ...explanation.catchments][0];
  const figure = bundleFigureSchema.parse({
    format: "rainreckon-bundle-1",
    version: version(),
    node: String(process.versions.node.split(".")[0]),
    place: {
      kind: place.kind,
      id: place.id,
      name: place.name,
      latDeg: place.latDeg,
      lonDeg: place.lonDeg,
      areaKm2: place.areaKm2,
    },
    run: {
      title: manifest.title,
      status: manifest.status,
      runDigest: manifest.runDigest,
      planDigest: manifest.planDigest,
    },
    headline: {
      depthMm: place.window.depthMm,
      noAdjustmentMm: place.window.radarMm,
      gaugesOnlyMm: place.window.gaugesOnlyMm,
      defaultSettingsMm: byDefault.bestMm,
      defaultSettingsNoAdjustmentMm: byDefault.radarMm,
      p10Mm: place.window.p10Mm,
      p90Mm: place.window.p90Mm,
      observedFraction: place.window.observedFraction,
      lowerBound: place.window.lowerBound,
      range3x3: place.window.range3x3,
    },
    changedSettings: changed,
    overrides: run.loaded.plan.overrides,
    filesBehind: scansBehind(explanation).map(inputs.nameOf),
    gaugesBehind: (account?.adjustment.gauges ?? []).map(({ network, gaugeId }) => `${network}/${gaugeId}`),
    licences: [...licences],
    commands: commandsOf(asked, place, tables, inputs.plan),
  } satisfies BundleFigure);
  const entries: ArchiveEntry[] = [
    ...inputs.entries,
    ...(await outputsOf(outcome)),
    ...tables.map(({ name, path: from }) => ({ name, path: from })),
    { name: "event.json", text: toJson(packed as JsonValue) },
    { name: "event.txt", text: `${eventText(packed)}\n` },
    { name: "event.html", text: eventPage({ ...outcome, report: packed }, place, series) },
    { name: "explain.json", text: toJson(withoutFolder(explanation) as JsonValue) },
    { name: "explain.txt", text: `${explainText(withoutFolder(explanation))}\n` },
    { name: "gauge-rows.csv", text: await gaugeRows(run, place, figure.gaugesBehind) },
    { name: "figure.json", text: toJson(figure as JsonValue) },
    { name: "README.txt", text: bundleReadme({ figure, preparedBy }) },
  ];
  const checked = [...entries, { name: "checksums.sha256", text: await checksums(entries) }];
  await writeBeside(file, (draft) =>
    writeTarGz(
      draft,
      checked.map((entry) => ({ ...entry, name: `${top}/${entry.name}` })),
      run.window.endEpochMs,
    ),
  );
  terminal.note(
    `${file}: ${counted(checked.length, "file")}, ${(statSync(file).size / 1e6).toFixed(1)} MB; its README.txt says how the figure is made again`,
  );
}

function onePlace({ places }: EventReport): PlaceReport {
  const [place] = places;
  if (place !== undefined && places.length === 1) return place;
  throw usage(
    `a bundle holds the figure of one place, and ${places.length} were asked for`,
    "--bundle",
    "name one with --catchment, --asset, --gauge or --at",
  );
}

function explainAsked(place: PlaceReport, series: PlaceSeries): Parameters<typeof explainRun>[1]["asked"] {
  if (place.kind === "catchment") return { points: [], gauges: [], catchments: [place.id] };
  if (series.gauge !== undefined)
    return { points: [], gauges: [gaugeName(series.gauge.input)], catchments: [] };
  return { points: [{ latDeg: place.latDeg ?? 0, lonDeg: place.lonDeg ?? 0 }], gauges: [], catchments: [] };
}

/** Tables that the command line names, and where they go. */
interface BundledTable {
  readonly flag: "--frequency" | "--areal-reduction" | "--assets";
  readonly name: string;
  readonly path: string;
}

function tablesOf({ frequencyFile, arealReductionFile, assetsFile }: EventAsked): BundledTable[] {
  return [
    ...(frequencyFile === undefined
      ? []
      : [{ flag: "--frequency" as const, name: "tables/frequency.csv", path: frequencyFile }]),
    ...(arealReductionFile === undefined
      ? []
      : [
          {
            flag: "--areal-reduction" as const,
            name: "tables/areal-reduction.csv",
            path: arealReductionFile,
          },
        ]),
    ...(assetsFile === undefined
      ? []
      : [{ flag: "--assets" as const, name: "tables/assets.csv", path: assetsFile }]),
  ];
}

/** The report as it is made again in the folder of the bundle: with the names that files have there. */
function packedReport(report: EventReport, tables: readonly BundledTable[]): EventReport {
  const nameOf = (flag: BundledTable["flag"]) => tables.find((table) => table.flag === flag)?.name ?? "";
  const { frequency } = report;
  return {
    ...report,
    run: { ...report.run, folder: AGAIN },
    frequency:
      frequency === null
        ? null
        : {
            ...frequency,
            file: nameOf("--frequency"),
            arealReduction:
              frequency.arealReduction === null
                ? null
                : { ...frequency.arealReduction, file: nameOf("--areal-reduction") },
          },
  };
}

/** Folder into which the figure is made again. */
const AGAIN = "again";

function withoutFolder(explanation: Explanation): Explanation {
  return { ...explanation, run: { ...explanation.run, folder: "run" } };
}

/** What makes the figure again, to be run in the folder of the bundle. */
function commandsOf(
  asked: EventAsked,
  place: PlaceReport,
  tables: readonly BundledTable[],
  plan: string,
): string[] {
  const placeFlags =
    place.kind === "catchment"
      ? ["--catchment", quoted(place.id)]
      : place.kind === "asset"
        ? ["--asset", quoted(place.id)]
        : place.kind === "gauge"
          ? ["--gauge", quoted(place.id)]
          : ["--at", quoted(positionText(place))];
  const rest = [
    ...tables.flatMap(({ flag, name }) => [flag, name]),
    ...(asked.shownAs === undefined ? [] : ["--as-series", asked.shownAs]),
    ...(asked.dryTimeMs === undefined ? [] : ["--dry-time", `PT${asked.dryTimeMs / 60_000}M`]),
    ...(asked.thresholdMm === undefined ? [] : ["--threshold-mm", String(asked.thresholdMm)]),
    ...(asked.durationsMs === undefined
      ? []
      : ["--durations", asked.durationsMs.map((ms) => ms / 60_000).join(",")]),
    ...(asked.clockAligned ? ["--clock-aligned"] : []),
    ...(asked.fromGrid ? ["--from-grid"] : []),
  ];
  return [
    "sha256sum --check --quiet checksums.sha256",
    `rainreckon total ${quoted(plan)} --out ${AGAIN}`,
    `rainreckon event ${AGAIN} ${[...placeFlags, ...rest].join(" ")} --json`,
  ];
}

/** To the last digit, so that the very same place is asked for. */
function positionText({ latDeg, lonDeg }: PlaceReport): string {
  const [lat, lon] = [latDeg ?? 0, lonDeg ?? 0];
  return `${Math.abs(lat)}${lat < 0 ? "S" : "N"} ${Math.abs(lon)}${lon < 0 ? "W" : "E"}`;
}

/** For a shell: in single quotes where anything but plain characters is in it. */
function quoted(text: string): string {
  return /^[\w./-]+$/.test(text) ? text : `'${text.replaceAll("'", "'\\''")}'`;
}

/** Outputs of the run, each with the SHA-256 of the manifest, and the manifest. */
async function outputsOf({ run: { folder, done } }: EventOutcome): Promise<ArchiveEntry[]> {
  const names = done.manifest.outputs.map((output) => output.file).filter((name) => name !== RUN_LOG);
  const entries: ArchiveEntry[] = [];
  for (const name of names)
    entries.push({ name: `run/${name}`, path: await checkedOutput(folder, done, name) });
  return [...entries, { name: `run/${MANIFEST}`, path: path.join(folder, MANIFEST) }];
}

/** Scans that the account is made of, by the names of the manifest, each once. */
function scansBehind({ points, catchments }: Explanation): string[] {
  const files = [
    ...points.flatMap(({ scans }) => scans.flatMap(({ file }) => file ?? [])),
    ...catchments.flatMap(({ scans }) => scans.flatMap(({ files: several }) => several)),
  ];
  return [...new Set(files)].sort();
}

/** Gauges near the place that are told of whether they move its figure or not. House rule. */
const NEAREST_GAUGES = 10;

interface GaugeReadingRow {
  readonly gauge: PreparedRun["gauges"]["gauges"][number];
  readonly k: number;
  readonly moves: boolean;
}

/** Readings within the window, as they went into the run: of the gauges that move the figure, and of the nearest. */
function gaugeRows(
  { gauges: { gauges }, catchments, grid, map, window }: PreparedRun,
  place: PlaceReport,
  behind: readonly string[],
): Promise<string> {
  const { xM, yM } = middleOf(place, catchments, grid, map);
  const nearest = gauges
    .toSorted((a, b) => Math.hypot(a.xM - xM, a.yM - yM) - Math.hypot(b.xM - xM, b.yM - yM))
    .slice(0, NEAREST_GAUGES);
  function* rows(): Generator<GaugeReadingRow> {
    for (const gauge of gauges) {
      const moves = behind.includes(gaugeName(gauge));
      if (!moves && !nearest.includes(gauge)) continue;
      const { startEpochMs, endEpochMs } = gauge.series;
      for (let k = 0; k < startEpochMs.length; k++) {
        const touches =
          (endEpochMs[k] as number) > window.startEpochMs && (startEpochMs[k] as number) < window.endEpochMs;
        if (touches) yield { gauge, k, moves };
      }
    }
  }
  const columns: CsvColumn<GaugeReadingRow>[] = [
    { kind: "text", name: "network", of: ({ gauge }) => gauge.series.network },
    { kind: "text", name: "gauge_id", of: ({ gauge }) => gauge.series.id },
    { kind: "text", name: "moves_figure", of: ({ moves }) => (moves ? "yes" : "no") },
    {
      kind: "number",
      name: "distance_km",
      decimals: 2,
      of: ({ gauge }) => Math.hypot(gauge.xM - xM, gauge.yM - yM) / 1000,
    },
    { kind: "text", name: "start", of: ({ gauge, k }) => isoUtc(gauge.series.startEpochMs[k] as number) },
    { kind: "text", name: "end", of: ({ gauge, k }) => isoUtc(gauge.series.endEpochMs[k] as number) },
    { kind: "number", name: "depth_mm", decimals: 4, of: ({ gauge, k }) => gauge.series.depthMm[k] },
  ];
  return csvText(columns, rows());
}

/** The place on the grid's map; of a catchment the mean of its cells. */
function middleOf(
  place: PlaceReport,
  catchments: PreparedRun["catchments"],
  grid: PreparedRun["grid"],
  map: PreparedRun["map"],
): { readonly xM: number; readonly yM: number } {
  const catchment = catchments.find(({ id }) => place.kind === "catchment" && id === place.id);
  if (catchment === undefined) {
    const [xM, yM] = map.forward(place.lonDeg ?? 0, place.latDeg ?? 0);
    return { xM, yM };
  }
  const centres = Array.from(catchment.cells.cells, (cell) => cellCentre(grid, cell));
  const mean = (of: (centre: (typeof centres)[number]) => number) =>
    centres.reduce((sum, centre) => sum + of(centre), 0) / centres.length;
  return { xM: mean(({ xM }) => xM), yM: mean(({ yM }) => yM) };
}

/** As `sha256sum --check` reads it. */
async function checksums(entries: readonly ArchiveEntry[]): Promise<string> {
  const lines: string[] = [];
  for (const entry of entries)
    lines.push(
      `${"text" in entry ? sha256Hex(entry.text) : await sha256OfFile(entry.path)}  ${entry.name}\n`,
    );
  return lines.join("");
}

/** Writes to another name first, so that half a bundle never bears the name of one. */
async function writeBeside(file: string, write: (draft: string) => Promise<void>): Promise<void> {
  const draft = `${file}.part`;
  const clear = () => rmSync(draft, { force: true });
  process.once("exit", clear);
  try {
    await write(draft);
    renameSync(draft, file);
  } finally {
    process.off("exit", clear);
    clear();
  }
}

function usage(what: string, where: string, fix: string): InputError {
  return new InputError(what, displayText(where, 400), fix, { kind: "usage" });
}
