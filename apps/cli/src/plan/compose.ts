import path from "node:path";
import { type Grid, InputError } from "@rainreckon/core";
import { planGrid } from "@rainreckon/mosaic";
import { Document, isCollection, isMap, type Node, YAMLMap, YAMLSeq } from "yaml";
import type { GaugeFinding, Guessed, RadarFinding, StationFinding } from "../survey/findings.ts";
import type { GridSource } from "../survey/grid-sources.ts";
import { GAP_ROUNDS } from "../survey/radars.ts";
import type { Point, SurveyResult } from "../survey/survey-result.ts";
import { counted } from "../ui/numbers.ts";
import { globsFor, relativePath } from "./globs.ts";
import { DEFAULT_RELATION, planSchema } from "./schema.ts";

const CELL_M = 1000;
const MARGIN_M = 10_000;
/** How far around the radars a map reaches where neither catchments nor gauges say what matters. */
const RADAR_MARGIN_M = 150_000;
/** A map of more cells across than this is more than a first plan needs. */
const MAX_CELLS_ACROSS = 2000;
/** Cells that even a grid around the whole Earth has few of. */
const COARSE_CELL_M = 64_000;
const ROUND_MINUTES_UNKNOWN = 5;
const BEAM_WIDTH_UNKNOWN_DEG = 1;

/** A value of the plan with where it comes from. */
interface Marked {
  readonly value: unknown;
  readonly mark: string;
  /** True: on one line, in braces or brackets. */
  readonly flow?: boolean;
}
type Entries = Readonly<Record<string, Marked | Node | undefined>>;

const found = (value: unknown, why = ""): Marked => ({ value, mark: why === "" ? "found" : `found: ${why}` });
const guessed = (value: unknown, why: string): Marked => ({ value, mark: `guessed: ${why}` });
const byDefault = (value: unknown, why = ""): Marked => ({
  value,
  mark: why === "" ? "default" : `default: ${why}`,
});
const inline = (marked: Marked): Marked => ({ ...marked, flow: true });

const SETTINGS = { version: "1.2", schema: "core" } as const;
/** Makes nodes; itself it stays empty. */
const factory = new Document(null, SETTINGS);

/** A map with a remark behind each of its values. */
function mapNode(entries: Entries): YAMLMap {
  const map = new YAMLMap();
  for (const [key, entry] of Object.entries(entries)) {
    if (entry === undefined) continue;
    map.set(factory.createNode(key), "mark" in entry ? markedNode(entry) : entry);
  }
  return map;
}

/** @param whyEmpty - what to say where there is no item */
function listNode(items: readonly Node[], whyEmpty = ""): YAMLSeq {
  const list = new YAMLSeq();
  list.flow = items.length === 0;
  if (items.length === 0) list.comment = ` ${whyEmpty}`;
  list.items.push(...items);
  return list;
}

function markedNode({ value, mark, flow }: Marked): Node {
  const node: Node = factory.createNode(value);
  const remark = ` ${oneLine(mark)}`;
  if (isCollection(node)) node.flow = flow === true || node.items.length === 0;
  // Behind a block the remark would stand under its last line, so it goes above its first.
  if (isCollection(node) && !node.flow) node.commentBefore = remark;
  else node.comment = remark;
  return node;
}

/** Remarks hold words from files: a line break in one would turn the rest of it into plan. */
function oneLine(text: string): string {
  return text.replace(/[\u0000-\u001f\u007f-\u009f\u2028\u2029]+/g, " ");
}

/**
 * A new plan from what a survey found.
 *
 * @param folder - the folder that the plan will lie in: its paths count from there
 * @returns YAML 1.2 with comments
 */
export function composePlan(
  result: SurveyResult,
  folder: string,
  title: string,
  gridLike?: GridLike,
): string {
  const { findings } = result;
  const upper = mapNode({
    title: byDefault(title),
    reference: byDefault("", "your file number"),
    author: byDefault(""),
    status: byDefault("provisional", "provisional or final"),
    window: windowNode(result),
    radars: listNode(
      findings.radars.map((radar) => radarNode(radar, result.radarsInWindow.has(radar.id))),
      "found: none with scans",
    ),
    ...(result.gridSources.length === 0
      ? {}
      : { grids: listNode(result.gridSources.map((source) => gridsNode(source, result, folder))) }),
    gauges: listNode(gaugeNodes(result, folder), "found: none with readings and stations"),
    catchments: catchmentsNode(result, folder),
    assets: assetsNode(result, folder),
    intervals: mapNode({
      grids: byDefault("PT1H", "step of the maps"),
      series: byDefault("PT5M", "step of catchments and gauges"),
    }),
    adjustment: mapNode({
      method: byDefault(
        "by-cross-validation",
        "or a method by its name, mean-field-bias say; none; the README names all",
      ),
      minGauges: byDefault(5, "trusted gauges, at least 5"),
      minGaugeSumMm: byDefault(10, "mm summed over them, at least 10"),
      factorLimits: inline(byDefault([0.1, 10], "gauge over radar; beyond them nothing is adjusted")),
    }),
    overrides: inline(byDefault([], "{network, gauge, verdict: use or leave-out, reason, by, date}")),
  });
  const scans = findings.radars.flatMap((radar) => radar.files.map((file) => path.resolve(file)));
  if (scans.length > 0) {
    upper.set(
      factory.createNode("scans"),
      markedNode(found(globsFor(scans, result.files, folder), "recognised by content")),
    );
  }
  upper.set(factory.createNode("grid"), gridLike === undefined ? gridNode(result) : likeNode(gridLike));
  for (const section of ["rain", "echo", "pairs", "bootstrap"] as const) {
    upper.set(
      factory.createNode(section),
      section === "echo" ? echoNode(findings, folder) : defaultsNode(section),
    );
  }
  ruleBefore(upper, scans.length > 0 ? "scans" : "grid");
  const document = new Document(upper, SETTINGS);
  document.commentBefore = HEADER;
  return document.toString({ lineWidth: 0 });
}

const HEADER = ` Plan of a rain total. Change what you know better; each remark says where a value comes from:
 found (in the files), guessed (and why), default (nobody has chosen it yet).`;

const RULE = ` ---- The rest: what seldom has to change -----------------------------------------------`;

function ruleBefore(map: YAMLMap, key: string): void {
  const pair = map.items.find((item) => String(item.key) === key);
  const node = pair?.key as Node | undefined;
  if (node === undefined) return;
  node.commentBefore = RULE;
  node.spaceBefore = true;
}

function windowNode({ findings }: SurveyResult): Node {
  const { window } = findings;
  if (window === null) throw new RangeError("a plan needs a window");
  const why = {
    "radars and gauges": "time that radars and gauges share, to whole steps",
    radars: "time of the scans, to whole steps",
    "grids and gauges": "time that the gridded layers and gauges share, to whole steps",
    grids: "time of the gridded layers, to whole steps",
  }[window.basis];
  return mapNode({
    from: found(window.from, why),
    to: found(window.to, why),
    zone: byDefault("UTC", "clock that people read beside UTC, such as Europe/Oslo"),
  });
}

/** One entry of `radars`. */
export function radarNode(radar: RadarFinding, inWindow: boolean): Node {
  const round = radar.medianRoundMinutes ?? ROUND_MINUTES_UNKNOWN;
  const roundMark: Marked =
    radar.medianRoundMinutes === null
      ? byDefault(round, "there is one round only")
      : found(round, "median time between rounds");
  const rain = radar.quantities.some((quantity) => quantity.name === "DBZH");
  const other = radar.quantities.find((quantity) => quantity.name === "TH");
  const name = radar.name === undefined ? "" : radar.name;
  return mapNode({
    id: found(radar.id, name),
    use: inWindow
      ? byDefault(true)
      : guessed(false, "its scans lie outside the window, or there is one round only"),
    offsetDb: byDefault(0, "dB, added to every reflectivity"),
    relation: byDefault(DEFAULT_RELATION, "it was not chosen by anyone; compare: rainreckon relate table"),
    cap: inline(byDefault({ dbz: 53 }, "or {mmPerHour: 100}")),
    maxBeamHeightM: byDefault(3000, "m above the antenna"),
    medianRoundMinutes: roundMark,
    maxGapMinutes: guessed(
      Number((GAP_ROUNDS * round).toFixed(3)),
      `${GAP_ROUNDS} median rounds; longer holes are not bridged`,
    ),
    moment: rain || other === undefined ? undefined : guessed("TH", "the files offer no DBZH"),
    beamWidthDeg:
      radar.beamWidthDeg === undefined ? byDefault(BEAM_WIDTH_UNKNOWN_DEG, "the files give none") : undefined,
  });
}

/** One entry of `grids`. */
export function gridsNode(source: GridSource, { files }: SurveyResult, folder: string): Node {
  const { id, quantity, stepMinutes, inWindow } = source;
  const step = stepMinutes ?? ROUND_MINUTES_UNKNOWN;
  const isDepth = quantity === "depth";
  const paths = source.files.map((file) => path.resolve(file));
  return mapNode({
    id: byDefault(id, "its name in every output"),
    files: inline(found(globsFor(paths, files, folder), "recognised by content")),
    use: inWindow
      ? byDefault(true, "ask its maker what was corrected, and whether gauges were used")
      : guessed(false, "other sources cover this, or there is one instant only"),
    quantity: found(quantity, counted(source.spans.length, "layer")),
    medianStepMinutes: isDepth
      ? undefined
      : stepMinutes === null
        ? byDefault(step, "there is one layer only")
        : found(step, "median time between layers"),
    maxGapMinutes: isDepth
      ? undefined
      : guessed(
          Number((GAP_ROUNDS * step).toFixed(3)),
          `${GAP_ROUNDS} median steps; longer holes are not bridged`,
        ),
    ...(quantity === "reflectivity"
      ? {
          offsetDb: byDefault(0, "dB, added to every reflectivity"),
          relation: byDefault(
            DEFAULT_RELATION,
            "it was not chosen by anyone; compare: rainreckon relate table",
          ),
          cap: inline(byDefault({ dbz: 53 }, "or {mmPerHour: 100}")),
        }
      : {}),
  });
}

/** Entries of `gauges`: one for each network whose stations are known. */
export function gaugeNodes({ findings }: SurveyResult, folder: string): Node[] {
  return gaugeGroups(findings.gauges, findings.stations).map((group) => gaugeNode(group, folder));
}

/** One entry of `gauges`. */
export function gaugeNode({ files, stations }: GaugeGroup, folder: string): Node {
  const first = files[0]!;
  const isWaterMl = first.layout.value === "waterml2";
  return mapNode({
    network: by(first.network),
    files: inline(found(files.map((file) => relativePath(path.resolve(file.file), folder)))),
    stations: stations.file === first.file ? undefined : inline(stationsMark(stations, folder)),
    layout: by(first.layout),
    columns: isWaterMl ? undefined : inline(by(first.columns)),
    ...idEntries(first),
    kind: by(first.kind),
    unit: by(first.unit),
    tipMm: first.tipMm === undefined ? undefined : by(first.tipMm),
    stepMinutes: first.stepMinutes === undefined ? undefined : by(first.stepMinutes),
    stamp:
      first.stamp === undefined
        ? byDefault("end", "end or start of the time that a reading covers")
        : by(first.stamp),
    zone:
      first.zone.value === null
        ? guessed("UTC", "the stamps name no zone: ask the network")
        : found(first.zone.value, first.zone.reason),
    dst: byDefault("follow", "never: the zone's standard time all year"),
    ...writtenEntries(first),
    silence: silenceMark(first),
    missing: inline(missingMark(first)),
    quality: first.qualityCodes.length === 0 ? undefined : inline(qualityMark(first.qualityCodes)),
    status: byDefault("unknown", "provisional or final, as the network says; retrieved: the day of fetching"),
  });
}

function stationsMark(stations: StationFinding, folder: string): Marked {
  return guessed(
    {
      file: relativePath(path.resolve(stations.file), folder),
      crs: stations.crs.value ?? "WRITE ITS EPSG CODE",
      columns: stations.columns.value,
      ...tableForm(stations),
    },
    `it names these gauges; ${stations.crs.reason}`,
  );
}

/** How a table of points is written, where it is not as most are. */
function tableForm({ encoding, headerLine, decimal }: StationFinding): Record<string, unknown> {
  return {
    ...(encoding === undefined || encoding.value === "utf-8" ? {} : { encoding: encoding.value }),
    ...(headerLine === undefined ? {} : { headerLine }),
    ...(decimal === "point" ? {} : { decimal }),
  };
}

/** Where a gauge's id is found, where no column names it. */
function idEntries({ idFrom, fileName, label }: GaugeFinding): Entries {
  if (idFrom.value === "column") return {};
  return {
    idFrom: by(idFrom),
    fileName: fileName === undefined ? undefined : guessed(fileName, "{id} is the id, * anything"),
    label: label === undefined ? undefined : guessed(label, "the text before the id"),
  };
}

/** How dates, numbers and characters are written, where it is not as most do. */
function writtenEntries({ dates, dateOnly, encoding, headerLine, decimal }: GaugeFinding): Entries {
  return {
    dates: dates.value === "ymd" ? undefined : by(dates),
    dayHour: dateOnly ? guessed("ask", "stamps are days: ask at which hour they begin, 0 to 23") : undefined,
    encoding: encoding.value === "utf-8" ? undefined : by(encoding),
    headerLine: headerLine === undefined ? undefined : found(headerLine, "other lines stand above it"),
    decimal: decimal.value === "point" ? undefined : by(decimal),
  };
}

function by(guess: Guessed<unknown>): Marked {
  return { value: guess.value, mark: `${guess.standing}: ${guess.reason}` };
}

/** Tips come only while it rains, so no line must mean dry; everywhere else it means that nothing is known. */
function silenceMark(gauge: GaugeFinding): Marked {
  return gauge.kind.value === "tips"
    ? guessed("dry", "no tip, no rain; or heartbeat PT60M where the gauge reports in between")
    : byDefault("missing", "what no line means: dry, missing, or heartbeat PT60M");
}

/** What the files write for "no value", added to what commonly stands for it. */
function missingMark(gauge: GaugeFinding): Marked {
  const usual = ["", "NaN", "-999"];
  const met = gauge.missing.value.filter((cell) => !usual.includes(cell));
  return met.length === 0 ? byDefault(usual) : guessed([...usual, ...met], gauge.missing.reason);
}

const GOOD = /^(ok|good|g|valid|v|pass|passed|use|used|checked|normal|0)$/i;
const BAD = /^(bad|b|drop|dropped|invalid|missing|m|fail|failed|error|reject|rejected|x)$/i;

/** The network's codes by their words; a code that says nothing is doubted, never used unseen. */
function qualityMark(codes: readonly string[]): Marked {
  const use = codes.filter((code) => GOOD.test(code.trim()));
  const drop = codes.filter((code) => BAD.test(code.trim()));
  const doubt = codes.filter((code) => !use.includes(code) && !drop.includes(code));
  return guessed({ use, doubt, drop }, "by the words; ask the network what its codes mean");
}

/** Gauge files that make one entry of `gauges`. */
export interface GaugeGroup {
  readonly files: readonly GaugeFinding[];
  readonly stations: StationFinding;
}

/** Gauge files that go together: one network, one form, one table of stations. */
export function gaugeGroups(
  gauges: readonly GaugeFinding[],
  stations: readonly StationFinding[],
): GaugeGroup[] {
  const groups = new Map<string, { files: GaugeFinding[]; stations: StationFinding }>();
  for (const gauge of gauges) {
    const table = stations.find((one) => one.file === gauge.stationsFile);
    if (table === undefined) continue;
    const key = JSON.stringify([
      gauge.network.value,
      gauge.layout.value,
      gauge.kind.value,
      gauge.unit.value,
      gauge.columns.value,
      gauge.dates.value,
      gauge.dateOnly,
      gauge.encoding.value,
      gauge.headerLine,
      gauge.decimal.value,
      gauge.idFrom.value,
      gauge.fileName,
      gauge.label,
      gauge.stamp?.value,
      // WaterML files with positions of their own go together.
      table.file === gauge.file ? "" : table.file,
    ]);
    const group = groups.get(key) ?? { files: [], stations: table };
    groups.set(key, group);
    group.files.push(gauge);
  }
  return [...groups.values()];
}

/** The entry `catchments`, where there is a map of them. */
export function catchmentsNode({ findings }: SurveyResult, folder: string): Node | undefined {
  const map = findings.catchments.find((one) => one.idField !== undefined);
  if (map?.idField === undefined) return undefined;
  return mapNode({
    file: found(relativePath(path.resolve(map.file), folder), `${map.polygonCount} areas`),
    id: by(map.idField),
    name: map.nameField === undefined ? undefined : by(map.nameField),
    layer:
      map.layers === undefined || map.layer === undefined
        ? undefined
        : map.layers.length > 1
          ? guessed(map.layer, `the first of ${map.layers.join(", ")}`)
          : found(map.layer),
    crs: map.crsKnown ? undefined : guessed("WRITE ITS EPSG CODE", "the file does not name it"),
  });
}

/** The entry `assets`, where there is a table that looks like one. */
export function assetsNode({ findings }: SurveyResult, folder: string): Node | undefined {
  const table = findings.stations.find(({ assets }) => assets);
  if (table === undefined) return undefined;
  const { id, name, x, y } = table.columns.value;
  return mapNode({
    file: found(relativePath(path.resolve(table.file), folder), `${table.stationCount} points`),
    crs: guessed(table.crs.value ?? "WRITE ITS EPSG CODE", table.crs.reason),
    columns: inline(by({ ...table.columns, value: { id, ...(name === undefined ? {} : { name }), x, y } })),
  });
}

/** A grid that somebody asked for, cell upon cell with a raster of theirs. */
export interface GridLike {
  readonly grid: Grid;
  readonly file: string;
}

function likeNode({ grid, file }: GridLike): Node {
  const why = `that of ${path.basename(file)}`;
  return mapNode(Object.fromEntries(Object.entries(grid).map(([key, value]) => [key, found(value, why)])));
}

function gridNode(result: SurveyResult): Node {
  const interest = [...result.catchmentPoints, ...result.gaugePoints];
  const radars = result.findings.radars.filter((radar) => result.radarsInWindow.has(radar.id));
  const outline = result.gridSources.filter(({ inWindow }) => inWindow).flatMap((source) => source.outline);
  const [grid, why] =
    interest.length > 0
      ? [
          planGrid(interest, { marginM: MARGIN_M, cellM: CELL_M }),
          `${MARGIN_M / 1000} km around catchments and gauges`,
        ]
      : radars.length > 0
        ? [
            planGrid(radars, { marginM: RADAR_MARGIN_M, cellM: CELL_M }),
            `${RADAR_MARGIN_M / 1000} km around the radars`,
          ]
        : [gridAround(outline), "all that the gridded layers cover; narrow it to what matters"];
  return mapNode({
    crs: guessed(grid.crs, "equal areas; centre to a tenth of a degree"),
    westM: guessed(grid.westM, why),
    northM: guessed(grid.northM, why),
    cellM: byDefault(grid.cellM, "m"),
    nx: guessed(grid.nx, why),
    ny: guessed(grid.ny, why),
  });
}

/** A grid around all that a gridded source covers, of larger cells where it is a continent. */
function gridAround(outline: readonly Point[]): Grid {
  if (outline.length === 0) {
    throw new InputError(
      "nothing says where the gridded layers lie, and there are neither catchments nor gauges",
      "the gridded files",
      "add a map of catchments",
      { kind: "no-input" },
    );
  }
  const { nx, ny } = planGrid(outline, { marginM: 0, cellM: COARSE_CELL_M });
  const acrossM = Math.max(nx, ny) * COARSE_CELL_M;
  let cellM = CELL_M;
  while (acrossM / cellM > MAX_CELLS_ACROSS) cellM *= 2;
  return planGrid(outline, { marginM: 0, cellM });
}

const REMARKS: Readonly<Record<string, string>> = {
  minRateMmPerHour: "mm/h; less counts as dry",
  effectiveRadiusFactor: "refraction: effective over true earth radius",
  minObserved: "share of time below which a table leaves the depth empty",
  taperKm: "km over which a radar's weight falls to 0 at the end of its coverage",
  resent: "which of two differing sweeps of one instant counts: first or last",
  headlineRelations: "the headline is also given under these",
  screening: "echo that is not rain; without: names of screens that are not used; fill: neighbours or none",
  blockage: "terrain: a GeoTIFF of heights; limit: share of the beam that is still corrected",
  gas: "air; use: if-told, always or never",
  attenuation: "rain; method: auto, linear, zphi, hitschfeld-bordan or none; dbPerDeg where it is known",
  profile: "melting layer; freezingHeightAslM where the scans do not show it",
  rate: "convective and stratiform: relations of their own",
  cell: "nearest or mean3x3",
  interval: "length of the pairs",
  thresholdMm: "mm; wet from here on",
  minCommonFraction: "share of the interval that both must have observed",
  seed: "same seed, same intervals",
  level: "confidence of the intervals",
};

/** The section `echo`, with the terrain model where there is one. */
function echoNode({ terrain }: SurveyResult["findings"], folder: string): Node {
  const section = defaultsNode("echo");
  const [model] = terrain;
  if (model === undefined || !isMap(section)) return section;
  const blockage = planSchema.shape.echo.parse({}).blockage;
  section.set(
    "blockage",
    markedNode(
      inline(
        guessed(
          { ...blockage, terrain: relativePath(path.resolve(model.file), folder) },
          `the terrain model, ${model.reason}; limit: share of the beam that is still corrected`,
        ),
      ),
    ),
  );
  return section;
}

/** A section as the schema fills it in. */
function defaultsNode(section: "rain" | "echo" | "pairs" | "bootstrap"): Node {
  const defaults = planSchema.shape[section].parse({}) as Record<string, unknown>;
  const entries = Object.entries(defaults).map(([key, value]): [string, Marked] => [
    key,
    inline(byDefault(value, REMARKS[key] ?? "")),
  ]);
  return mapNode(Object.fromEntries(entries));
}
