import { setImmediate as breathe } from "node:timers/promises";
import { arealDepth, FieldSum, pointDepth, StepBlender } from "@rainreckon/accumulation";
import { formatsReady } from "@rainreckon/formats";
import { COMPANIONS } from "./companions.ts";
import { GridFeed } from "./grid-feed.ts";
import {
  type AreaStepSeries,
  noCounts,
  type RunShape,
  type StepSeries,
  type SweepFault,
  type UnitJob,
  type UnitResult,
  type UnitTrace,
} from "./job.ts";
import { RadarFeed } from "./radar-feed.ts";
import { UnseenDepth } from "./unseen.ts";

/**
 * Does one unit of work: decodes the rounds that can reach into it (those at its borders too), and returns
 * complete depths for each of its intervals, and series at gauges and areas on its steps.
 *
 * A unit depends on nothing but its job, so units may run in any order and anywhere.
 *
 * @param trace - is told of what happens on the way, by who must account for it; it changes nothing
 */
export async function runUnit(shape: RunShape, job: UnitJob, trace?: UnitTrace): Promise<UnitResult> {
  await formatsReady();
  const { grid, headlineCells, variants } = shape;
  const cellCount = grid.nx * grid.ny;
  const size = { cellCount, headlineCells, variantCount: variants.length, companions: COMPANIONS };
  const counts = noCounts();
  const notices: SweepFault[] = [];
  const radars = shape.radars.map((radar) => new RadarFeed(radar, shape, job, trace));
  const feeds = [...radars, ...shape.grids.map((grids) => new GridFeed(grids, shape, job, trace))];
  const gauges = emptySeries(shape.gaugeCells.length, job.steps.length);
  const fieldMm = Array.from(shape.fieldCells, () => new Float32Array(job.steps.length));
  const areas: AreaStepSeries = {
    ...emptySeries(shape.areas.length, job.steps.length),
    maxCellMm: emptyRows(shape.areas.length, job.steps.length),
    cappedMm: emptyRows(shape.areas.length, job.steps.length),
  };
  const intervals: UnitResult["intervals"][number][] = [];
  const unseen = new UnseenDepth(grid, shape.radars);
  const unseenMm: Float32Array[] = [];
  const blender = new StepBlender(size, feeds.length);
  let sum = new FieldSum(cellCount, feeds.length, variants.length, headlineCells.length, COMPANIONS);

  for (let step = 0; step < job.steps.length; step++) {
    // Lets signals through: without it, work of hours on one processor could not be interrupted.
    await breathe();
    for (const feed of feeds) {
      while (!feed.integrator.isSettled(step, feed.nextEpochMs)) await feed.advance(counts, notices);
    }
    const span = job.steps[step];
    const lengthMs = span.endEpochMs - span.startEpochMs;
    // Integrators are asked for stretches of the step, so their layers are released only after blending.
    const taken = feeds.map((feed) => ({ step: feed.integrator.take(step), integrator: feed.integrator }));
    const blended = blender.blend(span, step, taken);
    trace?.step?.(span, step, taken, blended);
    for (const feed of feeds) feed.integrator.release();
    for (let g = 0; g < shape.gaugeCells.length; g++) {
      const point = pointDepth(shape.gaugeCells[g], blended, lengthMs);
      gauges.depthMm[g][step] = point.depthMm;
      gauges.observedFraction[g][step] = point.observedFraction;
    }
    fieldMm.forEach((row, f) => {
      row[step] = blended.depthMm[shape.fieldCells[f]];
    });
    for (let a = 0; a < shape.areas.length; a++) {
      const areal = arealDepth(shape.areas[a], blended, lengthMs);
      areas.depthMm[a][step] = areal.depthMm;
      areas.observedFraction[a][step] = areal.observedFraction;
      areas.maxCellMm[a][step] = areal.maxCellMm;
      areas.cappedMm[a][step] = areal.cappedMm;
    }
    sum.add(blended);
    unseen.add(span, blended, (r, epochMs) => radars[r].relationAt(epochMs));
    const interval = job.intervals[intervals.length];
    if (span.endEpochMs === interval.endEpochMs) {
      intervals.push(sum.toInterval(interval));
      unseenMm.push(unseen.take());
      sum = new FieldSum(cellCount, feeds.length, variants.length, headlineCells.length, COMPANIONS);
    }
  }
  return { intervals, unseenMm, gauges, fieldMm, areas, counts, notices };
}

function emptyRows(rows: number, columns: number): Float64Array[] {
  return Array.from({ length: rows }, () => new Float64Array(columns).fill(Number.NaN));
}

function emptySeries(rows: number, columns: number): StepSeries {
  return { depthMm: emptyRows(rows, columns), observedFraction: emptyRows(rows, columns) };
}
