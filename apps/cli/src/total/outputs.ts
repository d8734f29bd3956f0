import { durationMs, isohyetLevels, isohyets, volumeM3 } from "@rainreckon/accumulation";
import { CHOICE_RULE, CLUSTER_RULE, METHOD_TITLES } from "@rainreckon/adjustment";
import { gaugeKey, type Pair } from "@rainreckon/core";
import {
  type CsvColumn,
  createTotalsFile,
  displayText,
  type JsonValue,
  TOTALS_VARIABLES,
  type TotalsVariable,
  writeCsv,
  writeGeoTiff,
  writeIsohyets,
  writeJson,
  writeText,
} from "@rainreckon/formats";
import { type GaugeRow, gaugeRows, scoresDocument, scoresSchema } from "@rainreckon/verification";
import { isoUtc } from "../ui/numbers.ts";
import { version } from "../version.ts";
import { type Adjustment, adjustedIntervals } from "./adjust.ts";
import {
  adjustedPairMm,
  type ComparedGauge,
  type Comparison,
  crossValidatedPairMm,
} from "./against-gauges.ts";
import type { AssembledRun } from "./assemble.ts";
import { STANDING_CAUTIONS } from "./cautions.ts";
import { echoAccount, shownCompanions, wordsByRadar } from "./echo-account.ts";
import {
  type ArealFigure,
  assetFigures,
  bestMm,
  catchmentFigures,
  type FigurePlace,
  isAtCap,
  type PlaceFigure,
} from "./figures.ts";
import { sourceIds } from "./job.ts";
import { rangeOf3x3, shareOfDepth } from "./place-planes.ts";
import type { PreparedRun } from "./prepare.ts";
import { rangesOfRows, standardErrorPlane, type Uncertainty } from "./uncertainty.ts";
import { uncertaintyLines, uncertaintyWords } from "./uncertainty-words.ts";
import type { UnitStore } from "./unit-store.ts";

/** What every writer of an output needs. */
export interface OutputSources {
  readonly run: PreparedRun;
  readonly total: AssembledRun;
  readonly comparison: Comparison;
  readonly store: UnitStore;
  /** The adjusted total; undefined where there is no adjustment. */
  readonly adjustedTotalMm: Float32Array | undefined;
  readonly uncertainty: Uncertainty;
  readonly cautions: readonly string[];
  /** Where a file is to be written. */
  readonly draft: (file: string) => string;
}

/** `totals.nc`: planes of the window, and the depth of each interval, written one at a time. */
export async function writeTotals(sources: OutputSources): Promise<void> {
  const { run, total, comparison, store, adjustedTotalMm, uncertainty } = sources;
  const { planes } = total;
  const standardErrorMm =
    adjustedTotalMm !== undefined && uncertainty.known ? standardErrorPlane(uncertainty) : undefined;
  const { adjustment } = comparison;
  const companions = shownCompanions(total);
  const V = TOTALS_VARIABLES;
  const variables: TotalsVariable[] = [
    V.radar_total,
    ...(adjustedTotalMm === undefined ? [] : [V.adjusted_total]),
    ...(standardErrorMm === undefined ? [] : [V.adjusted_total_standard_error]),
    V.observed_fraction,
    V.bridged_fraction,
    V.edge_fraction,
    V.beam_height,
    V.cap_share,
    V.unseen_depth,
    ...companions.map(
      ({ name, longName, units, kind }): TotalsVariable => ({
        name,
        over: "window",
        longName,
        units,
        ...(kind === "toll" ? { cellMethods: "area: mean window_end: sum" } : {}),
      }),
    ),
    V.radar_share,
    V.radar_depth,
    ...(adjustedTotalMm === undefined ? [] : [V.adjusted_depth]),
  ];
  const file = await createTotalsFile(sources.draft("totals.nc"), {
    grid: run.grid,
    projString: run.map.projString,
    lonLat: lonLatOf(run),
    title: run.loaded.plan.title,
    cautions: sources.cautions,
    window: run.window,
    intervals: run.intervals,
    radarIds: sourceIds(run.shape),
    variables,
    attributes: {
      source: `weather radar, rainreckon ${version()}`,
      status: run.loaded.plan.status,
      run_digest: run.runDigest,
      adjustment: adjustmentAttribute(adjustment),
      uncertainty: uncertainty.known
        ? uncertaintyWords(uncertainty).join(" ")
        : `not told: ${uncertainty.reason}`,
    },
  });
  try {
    file.writeField2d("radar_total", planes.totalMm);
    if (adjustedTotalMm !== undefined) file.writeField2d("adjusted_total", adjustedTotalMm);
    if (standardErrorMm !== undefined) file.writeField2d("adjusted_total_standard_error", standardErrorMm);
    file.writeField2d("observed_fraction", planes.observedFraction);
    file.writeField2d("bridged_fraction", planes.bridgedFraction);
    file.writeField2d("edge_fraction", planes.edgeFraction);
    file.writeField2d("beam_height", planes.beamHeightAslM);
    file.writeField2d("cap_share", planes.cappedFraction);
    file.writeField2d("unseen_depth", total.unseenMm);
    for (const { name, values } of companions) file.writeField2d(name, values);
    for (const [r, share] of planes.radarShare.entries()) file.writeShares("radar_share", r, share);
    let k = 0;
    for (const job of run.jobs) {
      for (const { depthMm } of store.load(job).intervals) file.writeInterval("radar_depth", k++, depthMm);
    }
    if (adjustment.applied) {
      k = 0;
      for (const depthMm of adjustedIntervals(run, total, adjustment, store))
        file.writeInterval("adjusted_depth", k++, depthMm);
    }
  } catch (error) {
    file.abandon();
    throw error;
  }
  file.close();
}

function adjustmentAttribute(adjustment: Adjustment): string {
  if (!adjustment.applied) return `none: ${adjustment.reason}`;
  const { title, factor } = adjustment;
  return Number.isNaN(factor) ? title : `${title}, factor ${factor.toPrecision(6)} (gauge/radar)`;
}

/** Longitude and latitude of a cell's centre. */
export function lonLatOf({ grid, map }: PreparedRun): (index: number) => { lonDeg: number; latDeg: number } {
  return (index) => {
    const column = index % grid.nx;
    const row = (index - column) / grid.nx;
    const [lonDeg, latDeg] = map.inverse(
      grid.westM + (column + 0.5) * grid.cellM,
      grid.northM - (row + 0.5) * grid.cellM,
    );
    return { lonDeg, latDeg };
  };
}

/** The two GeoTIFFs and the isohyets. @returns the names of the files written */
export async function writeMaps(sources: OutputSources): Promise<string[]> {
  const { run, total, adjustedTotalMm } = sources;
  const { grid, map } = run;
  const written = ["radar_total.tif", "isohyets.geojson"];
  await writeGeoTiff(sources.draft("radar_total.tif"), {
    grid,
    projString: map.projString,
    values: total.planes.totalMm,
    description: "radar_total",
    unit: "mm",
  });
  if (adjustedTotalMm !== undefined) {
    await writeGeoTiff(sources.draft("adjusted_total.tif"), {
      grid,
      projString: map.projString,
      values: adjustedTotalMm,
      description: "adjusted_total",
      unit: "mm",
    });
    written.push("adjusted_total.tif");
  }
  const values = adjustedTotalMm ?? total.planes.totalMm;
  let maxMm = 0;
  for (const value of values) if (value > maxMm) maxMm = value;
  const lines = isohyets({ grid, quantity: "depthMm", values }, isohyetLevels(maxMm)).map((isohyet) => ({
    depthMm: isohyet.depthMm,
    lines: isohyet.lines.map((line) => line.map(([x, y]) => map.inverse(x, y))),
  }));
  await writeIsohyets(sources.draft("isohyets.geojson"), lines, {
    title: run.loaded.plan.title,
    of: adjustedTotalMm === undefined ? "radar_total" : "adjusted_total",
    unit: "mm",
    start: isoUtc(run.window.startEpochMs),
    end: isoUtc(run.window.endEpochMs),
    cautions: [...sources.cautions],
  });
  return written;
}

/** Makers of columns for rows of one kind. */
function columnsOf<Row>() {
  return {
    text: (name: string, of: (row: Row) => string | undefined): CsvColumn<Row> => ({
      kind: "text",
      name,
      of,
    }),
    number: (name: string, decimals: number, of: (row: Row) => number | undefined): CsvColumn<Row> => ({
      kind: "number",
      name,
      decimals,
      of,
    }),
  };
}

/** `catchments.csv`: the window, rain days and every step. */
export async function writeCatchments(sources: OutputSources): Promise<void> {
  const { text, number } = columnsOf<PlaceFigure<PreparedRun["catchments"][number]>>();
  const { minObserved } = sources.run.loaded.plan.rain;
  await writeCsv(
    sources.draft("catchments.csv"),
    [
      text("catchment_id", ({ place }) => place.id),
      text("name", ({ place }) => place.name),
      ...depthColumns(sources),
      number("max_cell_mm", 3, ({ figure }) => figure.maxCellMm),
      number("area_km2", 3, ({ place }) => place.areaKm2),
      number("volume_m3", 0, ({ place, figure }) =>
        figure.observedFraction >= minObserved ? volumeM3(bestMm(figure), place.areaKm2) : Number.NaN,
      ),
      ...snowColumns(sources),
    ],
    catchmentFigures(sources),
  );
}

/** `assets.csv`: the same of the cell that holds each asset, with the range of the nine cells about it. */
export async function writeAssets(sources: OutputSources): Promise<void> {
  const { run, total, adjustedTotalMm } = sources;
  const { text, number } = columnsOf<PlaceFigure<PreparedRun["assets"][number]>>();
  const field = adjustedTotalMm ?? total.planes.totalMm;
  const rangeOf = ({ place, span }: PlaceFigure<PreparedRun["assets"][number]>) =>
    span === "window" ? rangeOf3x3(run.grid, field, place.cell) : undefined;
  await writeCsv(
    sources.draft("assets.csv"),
    [
      text("asset_id", ({ place }) => place.id),
      text("name", ({ place }) => place.name),
      ...depthColumns(sources),
      number("min_3x3_mm", 3, (row) => rangeOf(row)?.leastMm),
      number("max_3x3_mm", 3, (row) => rangeOf(row)?.mostMm),
      number("lon_deg", 6, ({ place }) => place.lonDeg),
      number("lat_deg", 6, ({ place }) => place.latDeg),
      ...snowColumns(sources),
    ],
    assetFigures(sources),
  );
}

/** What is told of the depth of any place, from its start to the share observed. */
function depthColumns({ run, uncertainty }: OutputSources): CsvColumn<PlaceFigure<FigurePlace>>[] {
  const { minObserved } = run.loaded.plan.rain;
  const { text, number } = columnsOf<PlaceFigure<FigurePlace>>();
  const rangeOf = rangesOfRows(run, uncertainty);
  const none = Number.NaN;
  const whole = (figure: ArealFigure, mm: number) => (figure.observedFraction >= minObserved ? mm : none);
  return [
    text("start", ({ startEpochMs }) => isoUtc(startEpochMs)),
    text("end", ({ endEpochMs }) => isoUtc(endEpochMs)),
    number("depth_mm", 3, ({ figure }) => whole(figure, bestMm(figure))),
    number("depth_observed_mm", 3, ({ figure }) => bestMm(figure)),
    text("reason", (row) => reasonOf(row, minObserved)),
    number("radar_mm", 3, ({ figure }) => whole(figure, figure.radarMm)),
    number("adjusted_mm", 3, ({ figure }) => whole(figure, figure.adjustedMm)),
    number("gauges_only_mm", 3, ({ figure }) => figure.gaugesOnlyMm),
    number("p10_mm", 3, (row) => whole(row.figure, rangeOf(row)?.p10Mm ?? none)),
    number("p90_mm", 3, (row) => whole(row.figure, rangeOf(row)?.p90Mm ?? none)),
    number("observed_fraction", 4, ({ figure }) => figure.observedFraction),
  ];
}

/** Shares of the window's depth by what the beam met; steps do not tell them apart. */
function snowColumns({ run, total }: OutputSources): CsvColumn<PlaceFigure<FigurePlace>>[] {
  const { number } = columnsOf<PlaceFigure<FigurePlace>>();
  const toldApart = run.shape.radars.some(({ echo }) => echo !== undefined);
  return ["snow_fraction", "melting_fraction"].map((name) =>
    number(name, 4, ({ place, span }) =>
      toldApart && span === "window" ? shareOfDepth(place.cells, total.sum, name) : Number.NaN,
    ),
  );
}

/** Why a depth is missing, a lower bound, or at the cap; empty where it is plain. */
export function reasonOf({ figure }: Pick<PlaceFigure<unknown>, "figure">, minObserved: number): string {
  const reasons: string[] = [];
  if (figure.observedFraction === 0) reasons.push("not observed");
  else if (figure.observedFraction < minObserved) {
    reasons.push(
      `observed only ${Math.floor(100 * figure.observedFraction)} %: the depth seen is a lower bound`,
    );
  }
  if (isAtCap(figure)) reasons.push("at cap");
  return reasons.join("; ");
}

/** `pairs.csv`: by interval, by whole rain day, and over the window. */
export async function writePairs(sources: OutputSources): Promise<void> {
  const { comparison } = sources;
  const gauges = new Map(comparison.gauges.map((gauge) => [gaugeKey(gauge.gauge.series), gauge] as const));
  const of = (pair: Pair): PairRow[] => {
    const gauge = gauges.get(gaugeKey({ network: pair.network, id: pair.gaugeId }));
    return gauge === undefined ? [] : [{ pair, gauge }];
  };
  const all: PairRow[] = [
    ...comparison.pairs,
    ...comparison.gauges.flatMap(({ rainDays }) => rainDays),
    ...comparison.gauges.map(({ whole }) => whole),
  ].flatMap(of);
  const { text, number } = columnsOf<PairRow>();
  await writeCsv(
    sources.draft("pairs.csv"),
    [
      text("network", ({ pair }) => pair.network),
      text("gauge_id", ({ pair }) => pair.gaugeId),
      text("start", ({ pair }) => isoUtc(pair.startEpochMs)),
      text("end", ({ pair }) => isoUtc(pair.endEpochMs)),
      number("gauge_mm", 3, ({ pair }) => pair.gaugeMm),
      number("radar_mm", 3, ({ pair }) => pair.radarMm),
      number("adjusted_mm", 3, ({ gauge, pair }) => adjustedPairMm(comparison, gauge, pair)),
      number("cross_validated_mm", 3, ({ gauge, pair }) => crossValidatedPairMm(comparison, gauge, pair)),
      text("radar_id", ({ pair }) => pair.radarId),
      number("gauge_observed_fraction", 4, ({ pair }) => pair.gaugeObservedFraction),
      number("radar_observed_fraction", 4, ({ pair }) => pair.radarObservedFraction),
      number("range_km", 2, ({ pair }) => pair.rangeKm),
      number("beam_height_asl_m", 0, ({ pair }) => pair.beamHeightAslM),
      text("used", ({ pair }) => (pair.used ? "yes" : "no")),
      text("reason", ({ pair }) => pair.reason),
    ],
    all,
  );
}

interface PairRow {
  readonly pair: Pair;
  readonly gauge: ComparedGauge;
}

export async function writeGauges(sources: OutputSources): Promise<void> {
  const { gauges } = sources.comparison;
  const rows = gaugeRows(
    gauges.map(({ whole }) => whole),
    gauges.map(({ verdict }) => verdict),
  );
  const { text, number } = columnsOf<GaugeRow>();
  await writeCsv(
    sources.draft("gauges.csv"),
    [
      text("network", (row) => row.network),
      text("gauge_id", (row) => row.gauge_id),
      number("total_mm", 3, (row) => row.total_mm),
      number("radar_total_mm", 3, (row) => row.radar_total_mm),
      number("ratio_db", 3, (row) => row.ratio_db),
      text("verdict", (row) => row.verdict),
      text("cause", (row) => row.cause),
      text("evidence", (row) => row.evidence),
    ],
    rows,
  );
}

export async function writeScores(sources: OutputSources): Promise<void> {
  const { plan } = sources.run.loaded;
  const { before, after, choice } = sources.comparison;
  const document = scoresDocument({
    pairIntervalMs: durationMs(plan.pairs.interval),
    thresholdMm: plan.pairs.thresholdMm,
    bootstrap: plan.bootstrap,
    before,
    after,
    ...(choice === undefined
      ? {}
      : {
          methodChoice: {
            rule: CHOICE_RULE,
            clusterRule: CLUSTER_RULE,
            chosen: choice.chosen,
            outer: {
              errorMm: choice.validation.errorMm,
              meanErrorMm: choice.validation.meanErrorMm,
              clusterErrorMm: choice.clusterValidation.errorMm,
              gaugeCount: choice.validation.gaugeCount,
            },
            candidates: choice.candidates.map((candidate) => ({
              ...candidate,
              title: METHOD_TITLES[candidate.name],
              chosenInFolds: choice.chosenInFolds.get(candidate.name) ?? 0,
            })),
          },
        }),
  });
  await writeJson(sources.draft("scores.json"), scoresSchema.parse(document) as JsonValue);
}

/** How the depths were adjusted, for people who have only the files. */
function adjustmentLines({ adjustment, choice }: Comparison): string[] {
  const lines: string[] = [];
  if (!adjustment.applied) lines.push(`There are no adjusted depths: ${adjustment.reason}.`);
  else if (adjustment.method === "mean-field-bias") {
    lines.push(
      `Adjusted depths are radar depths times one factor, ${adjustment.factor.toFixed(3)} (gauge/radar): the ratio of sums over the pairs of ${adjustment.gaugeCount} trusted gauges, constant in time.`,
    );
  } else {
    lines.push(
      `Adjusted depths are made by ${adjustment.title}, from ${adjustment.gaugeCount} trusted gauges.`,
      adjustment.learned.kind === "factor"
        ? "The factor is the same everywhere."
        : adjustment.learned.ofInterval !== undefined
          ? "It works on each interval of the maps by itself."
          : "It works on the depth of the window; each cell keeps the radar's shape in time, and where the radar saw nothing the gauges' mean shape.",
      ...adjustment.notes.map((note) => `In it: ${note}.`),
    );
  }
  if (choice !== undefined) {
    lines.push(
      `The method was picked by cross-validation: ${CHOICE_RULE}. Clusters: ${CLUSTER_RULE}.`,
      "Where gauges are held out the others are judged anew, as if those were not there.",
      "The error that is published comes from gauges that had no part in the choice; scores.json holds the table.",
    );
  }
  return lines;
}

/** What was done to the echo before it became rain, for people who have only the files. */
function echoLines({ run, total, comparison }: OutputSources): string[] {
  const account = echoAccount(run, total, comparison);
  if (account === undefined) return [];
  return [
    "From echo to rain",
    "  Echo that is not rain was screened gate by gate; the rest was corrected for what hid or changed it on its way.",
    ...shownCompanions(total).map(({ name, longName }) => `  ${name.padEnd(34)}  ${longName}`),
    "  A toll (screened_depth_…) is the depth that screened echo would have made, each gate under the first screen that",
    "  took it, each round standing for one median round; it is no part of the total.",
    ...wordsByRadar(account).map(([id, words]) => `  radar ${id}: ${words.join("; ")}`),
    "",
  ];
}

/** `README.txt`: how to read the files of a run. CSVs hold no comment lines, so this stands beside them. */
export async function writeReadme(sources: OutputSources, files: readonly string[]): Promise<void> {
  const { run, comparison } = sources;
  const { plan } = run.loaded;
  const lines = [
    displayText(plan.title),
    `Status: ${plan.status}. Run digest: ${run.runDigest}. Made by rainreckon ${version()}.`,
    "",
    "Window and stamps",
    `  (${isoUtc(run.window.startEpochMs)}, ${isoUtc(run.window.endEpochMs)}], UTC everywhere. An interval is (start, end]: what is stamped on a border belongs`,
    "  to the interval ending there.",
    "",
    "Units",
    "  Depths in mm, shares from 0 to 1, heights in m above mean sea level, ranges in km, areas in km2.",
    `  Grid: ${run.grid.nx} x ${run.grid.ny} cells of ${run.grid.cellM} m, ${run.map.projString}; row 0 is the northernmost.`,
    "",
    "Missing is empty (CSV), null (JSON) or NaN (NetCDF, GeoTIFF): not observed, never 0.",
    "",
    "Definitions",
    "  depth_mm            the figure to use: adjusted where there is an adjustment, else radar; empty where less than",
    `                      ${Math.round(100 * plan.rain.minObserved)} % of area and time was observed`,
    "  depth_observed_mm   from the part that was observed, over the whole area: a lower bound; nothing is scaled up",
    "  observed_fraction   share of area and time that at least one radar observed",
    "  bridged_fraction    share of the window between scans more than 1.5 median rounds apart, bridged all the same",
    "  edge_fraction       share of the window before the first or after the last scan, for which that scan speaks",
    "  radar_share         share of the observed time that each radar spoke for, by blend weight",
    ...(run.shape.grids.length === 0
      ? []
      : [
          `                      gridded rain stands behind the radars: ${sourceIds(run.shape).join(", ")}`,
          "  beam_height         of the radars; missing where gridded rain alone spoke: nothing tells how high it was seen",
        ]),
    '  cap_share           share of the depth that came from gates at the hail cap; "at cap" says that it is not 0',
    "  unseen_depth        rain that the radars could not have seen: over the time without rain, the depth that an echo just",
    "                      below detection at that range would have added; the most that may be missing for that, no estimate",
    "  max_cell_mm         deepest cell of a catchment, over the window or in one step; empty in steps where the adjustment",
    "                      changes from cell to cell",
    "  volume_m3           depth_mm over the whole area of the catchment: 1 mm on 1 km2 is 1000 m3",
    "  snow_fraction       share of the window's depth from gates mostly in snow, melting_fraction in melting snow: at the",
    "                      height of the beam, which says nothing sure of what reached the ground; empty where no step from",
    "                      echo to rain was taken, and in rows of steps and rain days",
    ...(run.assets.length === 0
      ? []
      : [
          "  assets.csv          depths of the grid cell that holds each asset; min_3x3_mm and max_3x3_mm are the range of the",
          "                      nine cells about it: a single cell is the least certain of all figures",
        ]),
    "  gauges_only_mm      ordinary kriging of the trusted gauges without the radar, over the window; empty in other rows, and",
    "                      where gauges or their rain are too few",
    "  ratio_db            10 log10(radar/gauge): positive is radar wetter than gauge",
    "  factor              gauge/radar: what radar depths are multiplied by",
    "  cross_validated_mm  the adjusted depth at a gauge that this gauge had no part in",
    "",
    ...echoLines(sources),
    "Adjustment",
    ...adjustmentLines(comparison).map((line) => `  ${line}`),
    "",
    ...uncertaintyLines(
      sources.uncertainty,
      files.some((file) => file.startsWith("members/")),
    ),
    "",
    "Verdicts in gauges.csv",
    "  use, use with care, leave out, too little rain to judge; a gauge that is left out shapes nothing. The cause says",
    "  whose a difference is: the gauge's, its whole network's, the radar's, or nobody's.",
    "",
    "Cautions",
    ...sources.cautions.map((caution) => `  - ${displayText(caution, 600)}`),
    ...STANDING_CAUTIONS.map((caution) => `  - ${caution}`),
    "",
    "Files",
    ...files.toSorted().map((file) => `  ${file}`),
    "",
  ];
  await writeText(sources.draft("README.txt"), lines.join("\n"));
}
