import { setImmediate as breathe } from "node:timers/promises";
import { arealDepth, blendStep, FieldSum, pointDepth, RadarIntegrator } from "@rainreckon/accumulation";
import { InputError, type ZrRelation } from "@rainreckon/core";
import { formatsReady } from "@rainreckon/formats";
import { type RateLayer, RateLayerBuilder } from "@rainreckon/mosaic";
import { openScans } from "../scans/scan-files.ts";
import { GridFeed } from "./grid-feed.ts";
import {
  type AreaStepSeries,
  type JobRadar,
  type JobRound,
  type JobSweep,
  noCounts,
  type RunShape,
  type StepSeries,
  type SweepFault,
  type UnitCounts,
  type UnitJob,
  type UnitResult,
} from "./job.ts";
import { lookupShelf } from "./lookup-shelf.ts";
import { placesOf } from "./places-of.ts";
import { countCapped, RateMaker } from "./rate-maker.ts";
import { UnseenDepth } from "./unseen.ts";

/** One radar inside a unit: its rounds in time order, decoded one at a time. */
class RadarFeed {
  readonly integrator: RadarIntegrator;
  readonly #radar: JobRadar;
  readonly #rounds: readonly JobRound[];
  readonly #rates: RateMaker;
  readonly #shape: RunShape;
  readonly #owned: (epochMs: number) => boolean;
  #next = 0;

  constructor(radar: JobRadar, shape: RunShape, job: UnitJob) {
    const from = job.steps[0].startEpochMs;
    const to = job.steps[job.steps.length - 1].endEpochMs;
    const reachMs = Math.max(radar.time.maxGapMs, radar.time.medianRoundMs / 2);
    this.#radar = radar;
    this.#shape = shape;
    this.#rates = new RateMaker(radar);
    this.#owned = (epochMs) => epochMs > from && epochMs <= to;
    this.#rounds = radar.rounds.filter(
      (round) => round.lastMidEpochMs >= from - reachMs && round.firstMidEpochMs <= to + reachMs,
    );
    this.integrator = new RadarIntegrator(job.steps, radar.time, {
      cellCount: shape.grid.nx * shape.grid.ny,
      headlineCells: shape.headlineCells,
      variantCount: shape.variants.length,
    });
  }

  /** Earliest instant of the round that comes next; Infinity when there is none. */
  get nextEpochMs(): number {
    return this.#rounds[this.#next]?.firstMidEpochMs ?? Infinity;
  }

  relationAt(epochMs: number): ZrRelation {
    return this.#rates.relationAt(epochMs);
  }

  /** Decodes the next round and adds it. */
  advance(counts: UnitCounts, notices: SweepFault[]): void {
    const round = this.#rounds[this.#next++];
    const layer = this.#layer(round, counts, notices);
    if (layer !== undefined) this.integrator.add(layer, round);
  }

  #layer(round: JobRound, counts: UnitCounts, notices: SweepFault[]): RateLayer | undefined {
    const { grid, headlineCells, variants } = this.#shape;
    const builder = new RateLayerBuilder(grid.nx * grid.ny, headlineCells, variants.length);
    let spoken = 0;
    for (const sweep of round.sweeps) {
      try {
        spoken += this.#addSweep(builder, sweep, spoken > 0, counts);
      } catch (error) {
        if (!(error instanceof InputError)) throw error;
        // Readers name the file as it was handed to them; people and other machines know it by its name.
        const where = error.where.replace(sweep.path, sweep.name);
        notices.push({ what: error.what, where, fix: error.fix, file: sweep.name });
      }
    }
    return spoken > 0 ? builder.finish() : undefined;
  }

  #addSweep(builder: RateLayerBuilder, sweep: JobSweep, higher: boolean, counts: UnitCounts): number {
    const file = openScans(sweep, placesOf(this.#radar));
    try {
      const shape = file.readSweep(sweep.index, []);
      const lookup = lookupShelf(this.#shape.grid, this.#radar).forSweep(shape);
      if (!builder.canFill(lookup)) return 0;
      const decoded = file.readSweep(sweep.index, [this.#radar.moment]);
      const where = `${sweep.name}, ${decoded.origin.dataset}`;
      const relation = this.#rates.relationAt(sweep.midEpochMs);
      const gates = this.#rates.rates(decoded, relation, where);
      const others = this.#shape.variants.map((variant) => this.#rates.rates(decoded, variant, where));
      const filled = builder.add(lookup, gates, others, sweep.midEpochMs);
      if (this.#owned(sweep.midEpochMs)) {
        counts.sweepsDecoded++;
        counts.gatesRead += decoded.rayCount * decoded.gateCount;
        counts.gatesCapped += countCapped(gates);
        if (higher) counts.cellsFilledByHigherSweep += filled;
      }
      return filled;
    } finally {
      file.close();
    }
  }
}

/**
 * Does one unit of work: decodes the rounds that can reach into it (those at its borders too), and returns
 * complete depths for each of its intervals, and series at gauges and areas on its steps.
 *
 * A unit depends on nothing but its job, so units may run in any order and anywhere.
 */
export async function runUnit(shape: RunShape, job: UnitJob): Promise<UnitResult> {
  await formatsReady();
  const { grid, headlineCells, variants } = shape;
  const cellCount = grid.nx * grid.ny;
  const size = { cellCount, headlineCells, variantCount: variants.length };
  const counts = noCounts();
  const notices: SweepFault[] = [];
  const radars = shape.radars.map((radar) => new RadarFeed(radar, shape, job));
  const feeds = [...radars, ...shape.grids.map((grids) => new GridFeed(grids, shape, job))];
  const gauges = emptySeries(shape.gaugeCells.length, job.steps.length);
  const areas: AreaStepSeries = {
    ...emptySeries(shape.areas.length, job.steps.length),
    maxCellMm: emptyRows(shape.areas.length, job.steps.length),
    cappedMm: emptyRows(shape.areas.length, job.steps.length),
  };
  const intervals: UnitResult["intervals"][number][] = [];
  const unseen = new UnseenDepth(grid, shape.radars);
  const unseenMm: Float32Array[] = [];
  let sum = new FieldSum(cellCount, feeds.length, variants.length, headlineCells.length);

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
    const blended = blendStep(span, step, taken, size);
    for (const feed of feeds) feed.integrator.release();
    for (let g = 0; g < shape.gaugeCells.length; g++) {
      const point = pointDepth(shape.gaugeCells[g], blended, lengthMs);
      gauges.depthMm[g][step] = point.depthMm;
      gauges.observedFraction[g][step] = point.observedFraction;
    }
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
      sum = new FieldSum(cellCount, feeds.length, variants.length, headlineCells.length);
    }
  }
  return { intervals, unseenMm, gauges, areas, counts, notices };
}

function emptyRows(rows: number, columns: number): Float64Array[] {
  return Array.from({ length: rows }, () => new Float64Array(columns).fill(Number.NaN));
}

function emptySeries(rows: number, columns: number): StepSeries {
  return { depthMm: emptyRows(rows, columns), observedFraction: emptyRows(rows, columns) };
}
