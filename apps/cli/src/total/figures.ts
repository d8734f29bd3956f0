import { arealDepth, rainDays } from "@rainreckon/accumulation";
import type { Interval } from "@rainreckon/core";
import type { Comparison } from "./against-gauges.ts";
import type { AssembledRun } from "./assemble.ts";
import type { PreparedRun } from "./prepare.ts";

/** An areal depth with all that decides how it may be printed. NaN is missing. */
export interface ArealFigure {
  /** From the part observed, over the whole area: a lower bound where observedFraction is below 1. */
  readonly radarMm: number;
  /** The same times the adjustment's factor; NaN where there is no adjustment. */
  readonly adjustedMm: number;
  readonly observedFraction: number;
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

export interface CatchmentFigure extends Interval {
  readonly catchment: PreparedRun["catchments"][number];
  readonly span: "window" | "rain day" | "step";
  readonly figure: ArealFigure;
}

/** What all the depths of a run are made from. */
interface Sources {
  readonly run: PreparedRun;
  readonly total: AssembledRun;
  readonly comparison: Comparison;
}

/** Factor that radar depths are multiplied by; NaN where there is no adjustment. */
export function factorOf(comparison: Comparison): number {
  return comparison.bias.applied ? comparison.bias.factor : Number.NaN;
}

/** The depth of the district over the window. */
export function districtFigure({ run, total, comparison }: Sources): ArealFigure {
  return windowFigure(run.district, { run, total, comparison });
}

/** The depth of an area over the window; its deepest cell is known, as it is not over a run of steps. */
export function windowFigure(
  area: PreparedRun["district"],
  { run, total, comparison }: Sources,
): ArealFigure {
  const windowMs = run.window.endEpochMs - run.window.startEpochMs;
  const { depthMm, observedFraction, maxCellMm, cappedMm } = arealDepth(area, total.sum, windowMs);
  const factor = factorOf(comparison);
  return {
    radarMm: depthMm,
    adjustedMm: depthMm * factor,
    observedFraction,
    maxCellMm: Number.isNaN(factor) ? maxCellMm : maxCellMm * factor,
    cappedFraction: depthMm > 0 ? cappedMm / depthMm : 0,
  };
}

/** The district's window depth under each headline relation, before any adjustment. */
export function headlineUnderRelations({
  run,
  total,
}: Sources): { name: string; mm: number; observedFraction: number }[] {
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
export function* catchmentFigures(sources: Sources): Generator<CatchmentFigure> {
  const { run } = sources;
  const rule = run.loaded.plan.intervals.rainDay;
  const days = rule === undefined ? [] : rainDays(run.window, rule);
  for (const [a, catchment] of run.catchments.entries()) {
    yield { ...run.window, catchment, span: "window", figure: windowFigure(catchment.cells, sources) };
    for (const day of days) {
      const { startEpochMs, endEpochMs } = day;
      yield { startEpochMs, endEpochMs, catchment, span: "rain day", figure: spanFigure(a, day, sources) };
    }
    for (const step of run.steps) {
      yield { ...step, catchment, span: "step", figure: spanFigure(a, step, sources) };
    }
  }
}

/** A catchment over a span, from its steps; time of the span outside the window was not observed. */
export function spanFigure(area: number, span: Interval, { run, total, comparison }: Sources): ArealFigure {
  const { areas } = total;
  let radarMm = Number.NaN;
  let observedMs = 0;
  let cappedMm = 0;
  let maxStepMm = Number.NaN;
  let seen = 0;
  for (const [k, step] of run.steps.entries()) {
    if (step.startEpochMs < span.startEpochMs || step.endEpochMs > span.endEpochMs) continue;
    const depthMm = areas.depthMm[area][k];
    if (Number.isNaN(depthMm)) continue;
    seen++;
    radarMm = Number.isNaN(radarMm) ? depthMm : radarMm + depthMm;
    observedMs += areas.observedFraction[area][k] * (step.endEpochMs - step.startEpochMs);
    cappedMm += areas.cappedMm[area][k];
    maxStepMm = areas.maxCellMm[area][k];
  }
  const factor = factorOf(comparison);
  // The deepest cell of several steps need not be the deepest of any one: it is known for single steps only.
  const maxCellMm = seen === 1 ? maxStepMm : Number.NaN;
  return {
    radarMm,
    adjustedMm: radarMm * factor,
    observedFraction: Math.min(1, observedMs / (span.endEpochMs - span.startEpochMs)),
    maxCellMm: Number.isNaN(factor) ? maxCellMm : maxCellMm * factor,
    cappedFraction: radarMm > 0 ? cappedMm / radarMm : 0,
  };
}
