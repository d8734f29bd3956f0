import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import type { RainSeries } from "@rainreckon/accumulation";
import type { Interval } from "@rainreckon/core";
import { readTotals } from "@rainreckon/formats";
import { gaugeSteps } from "@rainreckon/verification";
import { type OpenedRun, openRun } from "../explain/open-run.ts";
import { type AskedPoint, findAsked, type PlacesOfRun } from "../explain/places-asked.ts";
import { type RemadeRun, remake } from "../explain/remade-run.ts";
import { cellAsArea, type PlacedAsset } from "../total/assets.ts";
import { bestMm, type FigureSources, isAtCap, placeFigures } from "../total/figures.ts";
import { rangeOf3x3 } from "../total/place-planes.ts";
import type { PreparedRun } from "../total/prepare.ts";
import { cellRange, learnUncertainty, type Uncertainty } from "../total/uncertainty.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import { groupedBy } from "./grouped.ts";
import { type DepthEnds, NO_ENDS, type PlaceSeries } from "./place-series.ts";

/** A point that the run holds no steps of. */
export type NewPlace = PlacedAsset & Pick<PlaceSeries, "kind"> & { readonly gauge: AskedPoint["gauge"] };

/** What is asked for on the grid of a run, as places of their own. */
export function placesAsked(
  run: PlacesOfRun,
  asked: Pick<Parameters<typeof findAsked>[1], "points" | "gauges">,
): NewPlace[] {
  return findAsked(run, { ...asked, catchments: [] }).points.map(({ name, lonDeg, latDeg, cell, gauge }) => ({
    kind: gauge === undefined ? "point" : "gauge",
    id: name,
    name: gauge?.station.name ?? "",
    lonDeg,
    latDeg,
    cell,
    cells: cellAsArea(run.grid, cell),
    areaKm2: (run.grid.cellM * run.grid.cellM) / 1e6,
    gauge,
  }));
}

/**
 * Steps of places that a run has not stored: the run is made again from the files of its manifest, by the code that
 * made it, with these places added to those it keeps steps of. They shape nothing: figures stay what they were.
 *
 * @param placesOf - the places, on the grid of the run
 * @throws InputError (kind "usage") as {@link openRun}
 */
export async function remadeSeries(
  folder: string,
  planPath: string | undefined,
  placesOf: (run: PreparedRun) => Promise<readonly NewPlace[]>,
  terminal: Terminal,
): Promise<{ readonly places: readonly PlaceSeries[]; readonly remarks: readonly string[] }> {
  const opened = await openRun(folder, planPath, terminal, (count, noun) =>
    progressBar(terminal, count, noun),
  );
  const places = await placesOf(opened.run);
  const remade = await madeAgain(withPlaces(opened, places), terminal);
  const stored = await readTotals(opened.totalsFile, ["radar_total", "adjusted_total"]);
  const sources: FigureSources = { ...remade, run: remade.opened.run };
  const { total, comparison, adjustedTotalMm } = remade;
  const uncertainty = learnUncertainty(sources.run, total, comparison, adjustedTotalMm);
  const series: PlaceSeries[] = [];
  const figures = placeFigures(places, opened.run.catchments.length, sources);
  const perPlace = groupedBy(figures, ({ place }) => place);
  for (const place of places) {
    const own = perPlace.get(place) ?? [];
    series.push(seriesOf(place, own, sources, remade, stored, uncertainty));
  }
  return { places: series, remarks: opened.remarks };
}

/** The run with the assets of its plan put aside, and these places in their stead. */
export function withPlaces(opened: OpenedRun, places: readonly PlacedAsset[]): OpenedRun {
  const { run } = opened;
  const areas = [...run.catchments, ...places].map(({ cells }) => cells);
  return { ...opened, run: { ...run, assets: places, shape: { ...run.shape, areas } } };
}

/** Makes a run again and keeps nothing of it on disk. */
export async function madeAgain(opened: OpenedRun, terminal: Terminal): Promise<RemadeRun> {
  const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-event-"));
  const clear = () => rmSync(scratch, { recursive: true, force: true });
  process.once("exit", clear);
  try {
    return await remake(opened, opened.run.window, {}, scratch, new Map(), terminal, []);
  } finally {
    process.off("exit", clear);
    clear();
  }
}

type Figures = Iterable<ReturnType<typeof placeFigures<NewPlace>> extends Generator<infer F> ? F : never>;

function seriesOf(
  place: NewPlace,
  figures: Figures,
  { run, total, adjustedTotalMm, comparison }: FigureSources,
  remade: RemadeRun,
  stored: ReadonlyMap<string, Float32Array>,
  uncertainty: Uncertainty,
): PlaceSeries {
  const count = run.steps.length;
  const startEpochMs = run.window.startEpochMs;
  const best: RainSeries = {
    startEpochMs,
    stepMs: run.stepMs,
    depthMm: new Float64Array(count).fill(Number.NaN),
    observedFraction: new Float64Array(count),
    atCap: new Uint8Array(count),
  };
  const radarMm = new Float64Array(count).fill(Number.NaN);
  let window: PlaceSeries["window"] | undefined;
  let step = 0;
  for (const { span, figure } of figures) {
    if (span === "window") {
      window = {
        depthMm: known(bestMm(figure)),
        radarMm: known(figure.radarMm),
        adjustedMm: known(figure.adjustedMm),
        gaugesOnlyMm: known(figure.gaugesOnlyMm),
        ...endsOf(uncertainty, place.cell, bestMm(figure)),
        observedFraction: figure.observedFraction,
        atCap: isAtCap(figure),
        volumeM3: null,
        range3x3: rangeOf3x3(run.grid, adjustedTotalMm ?? total.planes.totalMm, place.cell) ?? null,
      };
    }
    if (span !== "step") continue;
    best.depthMm[step] = bestMm(figure);
    best.observedFraction[step] = figure.observedFraction;
    best.atCap[step] = isAtCap(figure) ? 1 : 0;
    radarMm[step] = figure.radarMm;
    step++;
  }
  if (window === undefined) throw new RangeError("a place has no figure of the window");
  const same = (name: string, made: Float32Array | undefined) => {
    const [was, is] = [stored.get(name)?.[place.cell], made?.[place.cell]];
    return was === is || (Number.isNaN(was) && Number.isNaN(is));
  };
  const verdict = comparison.gauges.find(({ gauge }) => gauge === place.gauge)?.verdict.verdict;
  return {
    kind: place.kind,
    id: place.id,
    name: place.name,
    latDeg: place.latDeg,
    lonDeg: place.lonDeg,
    areaKm2: place.areaKm2,
    figure: adjustedTotalMm === undefined ? "radar" : "adjusted",
    from: "made again",
    exact: same("radar_total", remade.total.planes.totalMm) && same("adjusted_total", remade.adjustedTotalMm),
    best,
    radarMm,
    rangeOf: ({ from, to }, depthMm) =>
      endsOf(uncertainty, place.cell, depthMm, {
        startEpochMs: startEpochMs + from * run.stepMs,
        endEpochMs: startEpochMs + to * run.stepMs,
      }),
    window,
    gauge:
      place.gauge === undefined
        ? undefined
        : {
            verdict: verdict ?? "",
            readings: {
              ...gaugeSteps(place.gauge.series, startEpochMs, run.stepMs, count),
              atCap: best.atCap.map(() => 0),
            },
            input: place.gauge,
          },
    notes: [],
  };
}

/** The range of a depth at a cell, of the window or of a span of it. */
function endsOf(uncertainty: Uncertainty, cell: number, depthMm: number, span?: Interval): DepthEnds {
  if (!uncertainty.known) return NO_ENDS;
  const { p10Mm, p90Mm } = cellRange(uncertainty, cell, depthMm, span);
  return Number.isNaN(p10Mm + p90Mm) ? NO_ENDS : { p10Mm, p90Mm };
}

function known(value: number): number | null {
  return Number.isNaN(value) ? null : value;
}
