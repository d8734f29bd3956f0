import { arealDepth, rainDays } from "@rainreckon/accumulation";
import { cellCentre, type Interval } from "@rainreckon/core";
import type { Comparison } from "./against-gauges.ts";
import type { AssembledRun } from "./assemble.ts";
import type { PreparedRun } from "./prepare.ts";

/** An areal depth with all that decides how it may be printed. NaN is missing. */
export interface ArealFigure {
  /** From the part observed, over the whole area: a lower bound where observedFraction is below 1. */
  readonly radarMm: number;
  /** The same after adjustment; NaN where there is none. */
  readonly adjustedMm: number;
  /** Mean by the gauges alone; NaN where they do not allow it, and over spans shorter than the window. */
  readonly gaugesOnlyMm: number;
  readonly observedFraction: number;
  /** NaN where it is not known: over several steps, and over a step of a field that changes from cell to cell. */
  readonly maxCellMm: number;
  /** Share of the depth that came from gates at the cap. */
  readonly cappedFraction: number;
}

/** The figure a report stands behind: adjusted where there is one. */
export function bestMm(figure: ArealFigure): number {
  return Number.isNaN(figure.adjustedMm) ? figure.radarMm : figure.adjustedMm;
}

/** Share of a depth at the cap from which its figure is called "at cap". */
const AT_CAP_FROM = 0.001;

export function isAtCap(figure: ArealFigure): boolean {
  return figure.cappedFraction >= AT_CAP_FROM;
}

export interface PlaceFigure<Place> extends Interval {
  readonly place: Place;
  readonly span: "window" | "rain day" | "step";
  readonly figure: ArealFigure;
}

/** What figures are made of: an area of the run's shape. */
export interface FigurePlace {
  readonly cells: PreparedRun["district"];
}

/** What all the depths of a run are made from. */
export interface FigureSources {
  readonly run: PreparedRun;
  readonly total: AssembledRun;
  readonly comparison: Comparison;
  /** Undefined where there is no adjustment. */
  readonly adjustedTotalMm: Float32Array | undefined;
}

/** The depth of the district over the window. */
export function districtFigure(sources: FigureSources): ArealFigure {
  return windowFigure(sources.run.district, sources);
}

/** The depth of an area over the window; its deepest cell is known, as it is not over a run of steps. */
export function windowFigure(
  area: PreparedRun["district"],
  { run, total, comparison, adjustedTotalMm }: FigureSources,
): ArealFigure {
  const windowMs = run.window.endEpochMs - run.window.startEpochMs;
  const { depthMm, observedFraction, maxCellMm, cappedMm } = arealDepth(area, total.sum, windowMs);
  const adjusted =
    adjustedTotalMm === undefined
      ? undefined
      : arealDepth(
          area,
          { depthMm: adjustedTotalMm, observedMs: total.sum.observedMs, cappedMm: total.sum.cappedMm },
          windowMs,
        );
  return {
    radarMm: depthMm,
    adjustedMm: adjusted?.depthMm ?? Number.NaN,
    gaugesOnlyMm: gaugesOnlyMean(run, area, comparison.gaugesOnlyMm),
    observedFraction,
    maxCellMm: adjusted?.maxCellMm ?? maxCellMm,
    cappedFraction: depthMm > 0 ? cappedMm / depthMm : 0,
  };
}

/** Mean over an area's cells of what the gauges alone say, observed by a radar or not. */
function gaugesOnlyMean(
  { grid }: PreparedRun,
  { cells, fraction }: PreparedRun["district"],
  depthMm: Comparison["gaugesOnlyMm"],
): number {
  if (depthMm === undefined) return Number.NaN;
  let sum = 0;
  let whole = 0;
  for (let k = 0; k < cells.length; k++) {
    if (cells[k] < 0) return Number.NaN;
    const { xM, yM } = cellCentre(grid, cells[k]);
    sum += fraction[k] * depthMm(xM / 1000, yM / 1000);
    whole += fraction[k];
  }
  return sum / whole;
}

/** The district's window depth under each headline relation, before any adjustment. */
export function headlineUnderRelations({
  run,
  total,
}: FigureSources): { name: string; mm: number; observedFraction: number }[] {
  const windowMs = run.window.endEpochMs - run.window.startEpochMs;
  const { district, headlineRelations } = run;
  return headlineRelations.map(({ name }, variant) => {
    // A variant holds the district's cells only, in their order: so does the area it is summed over.
    const own = { ...district, cells: district.cells.map((_, k) => k) };
    const areal = arealDepth(
      own,
      {
        depthMm: total.variantMm[variant],
        observedMs: Array.from(district.cells, (cell) => total.sum.observedMs[cell]),
        cappedMm: new Float64Array(district.cells.length),
      },
      windowMs,
    );
    return { name, mm: areal.depthMm, observedFraction: areal.observedFraction };
  });
}

/** Depths of every catchment: over the window, over rain days, and on each step. */
export function catchmentFigures(
  sources: FigureSources,
): Generator<PlaceFigure<PreparedRun["catchments"][number]>> {
  return placeFigures(sources.run.catchments, 0, sources);
}

/** The same of every asset. */
export function assetFigures(sources: FigureSources): Generator<PlaceFigure<PreparedRun["assets"][number]>> {
  return placeFigures(sources.run.assets, sources.run.catchments.length, sources);
}

/** @param firstArea - place of the first one among the areas of the run's shape */
export function* placeFigures<Place extends FigurePlace>(
  places: readonly Place[],
  firstArea: number,
  sources: FigureSources,
): Generator<PlaceFigure<Place>> {
  const { run } = sources;
  const rule = run.loaded.plan.intervals.rainDay;
  const days = rule === undefined ? [] : rainDays(run.window, rule);
  for (const [k, place] of places.entries()) {
    const area = firstArea + k;
    const whole = windowFigure(place.cells, sources);
    const adjustedMm = adjustedSteps(area, whole.adjustedMm, sources);
    const spanOf = (span: Interval, from = 0, to = run.steps.length) =>
      spanFigure(area, span, { from, to }, adjustedMm, sources);
    yield { ...run.window, place, span: "window", figure: whole };
    for (const day of days) {
      const { startEpochMs, endEpochMs } = day;
      yield { startEpochMs, endEpochMs, place, span: "rain day", figure: spanOf(day) };
    }
    for (const [s, step] of run.steps.entries()) {
      yield { ...step, place, span: "step", figure: spanOf(step, s, s + 1) };
    }
  }
}

/**
 * Adjusted depth of each step of the window over a catchment, mm: its radar depth, times the factor of the
 * time where there is one, so scaled that the steps add up to the adjusted depth of the window. Where the
 * radar saw nothing all window long, the shape is that of the gauges' mean.
 *
 * @param windowMm - adjusted depth of the window over the catchment; NaN without an adjustment
 */
export function adjustedSteps(
  area: number,
  windowMm: number,
  { run, total, comparison }: FigureSources,
): Float64Array {
  const radar = total.areas.depthMm[area];
  const { adjustment } = comparison;
  if (!adjustment.applied) return radar.map(() => Number.NaN);
  const { learned, share } = adjustment;
  const shape = radar.map((mm, k) => {
    if (learned.kind === "field") return mm;
    const { startEpochMs, endEpochMs } = run.steps[k];
    return mm * learned.factorAt((startEpochMs + endEpochMs) / 2);
  });
  const sum = shape.reduce((added, mm) => (Number.isNaN(mm) ? added : added + mm), 0);
  return shape.map((mm, k) => {
    if (Number.isNaN(mm)) return Number.NaN;
    return sum > 0 ? (mm * windowMm) / sum : windowMm * share(run.steps[k]);
  });
}

/**
 * A catchment over a span, from its steps; time of the span outside the window was not observed.
 *
 * @param among - steps that may lie in the span
 * @param adjustedMm - as {@link adjustedSteps} gives it
 */
function spanFigure(
  area: number,
  span: Interval,
  among: { readonly from: number; readonly to: number },
  adjustedMm: Float64Array,
  { run, total, comparison }: FigureSources,
): ArealFigure {
  const { areas } = total;
  const { adjustment } = comparison;
  let radarMm = Number.NaN;
  let adjusted = Number.NaN;
  let observedMs = 0;
  let cappedMm = 0;
  let maxStepMm = Number.NaN;
  let seen = 0;
  for (let k = among.from; k < among.to; k++) {
    const step = run.steps[k];
    if (step.startEpochMs < span.startEpochMs || step.endEpochMs > span.endEpochMs) continue;
    const depthMm = areas.depthMm[area][k];
    if (Number.isNaN(depthMm)) continue;
    seen++;
    radarMm = Number.isNaN(radarMm) ? depthMm : radarMm + depthMm;
    adjusted = Number.isNaN(adjusted) ? adjustedMm[k] : adjusted + adjustedMm[k];
    observedMs += areas.observedFraction[area][k] * (step.endEpochMs - step.startEpochMs);
    cappedMm += areas.cappedMm[area][k];
    maxStepMm = areas.maxCellMm[area][k];
  }
  // The deepest cell of several steps need not be the deepest of any one, and that of an adjusted field not
  // the radar's: it is known for single steps of the radar, or of a factor that is the same everywhere.
  let maxCellMm = seen === 1 ? maxStepMm : Number.NaN;
  if (adjustment.applied && maxStepMm > 0) {
    maxCellMm *= adjustment.learned.kind === "factor" && radarMm > 0 ? adjusted / radarMm : Number.NaN;
  }
  return {
    radarMm,
    adjustedMm: adjusted,
    gaugesOnlyMm: Number.NaN,
    observedFraction: Math.min(1, observedMs / (span.endEpochMs - span.startEpochMs)),
    maxCellMm,
    cappedFraction: radarMm > 0 ? cappedMm / radarMm : 0,
  };
}
