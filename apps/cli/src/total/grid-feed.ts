import { RadarIntegrator } from "@rainreckon/accumulation";
import { InputError, MS_PER_HOUR, type ZrRelation } from "@rainreckon/core";
import { type GriddedScan, openGridded } from "@rainreckon/formats";
import { type CellLookup, type GateRates, type RateLayer, RateLayerBuilder } from "@rainreckon/mosaic";
import { layerLookup } from "./grid-shelf.ts";
import type { JobGrids, JobLayer, RunShape, SweepFault, UnitCounts, UnitJob, UnitTrace } from "./job.ts";
import { countCapped, RateMaker } from "./rate-maker.ts";

/** Gridded rain inside a unit: its layers in time order, decoded one at a time, brought to the plan's grid. */
export class GridFeed {
  readonly integrator: RadarIntegrator;
  readonly #source: JobGrids;
  readonly #rounds: readonly JobLayer[];
  readonly #rates: RateMaker | undefined;
  readonly #shape: RunShape;
  readonly #owned: (epochMs: number) => boolean;
  readonly #trace: UnitTrace | undefined;
  #next = 0;

  /** @param trace - is told of every layer */
  constructor(source: JobGrids, shape: RunShape, job: UnitJob, trace?: UnitTrace) {
    const from = job.steps[0].startEpochMs;
    const to = job.steps[job.steps.length - 1].endEpochMs;
    const reachMs = Math.max(source.time.maxGapMs, source.time.medianRoundMs / 2);
    this.#source = source;
    this.#shape = shape;
    this.#trace = trace;
    this.#rates = source.conversion === undefined ? undefined : new RateMaker(source.conversion);
    this.#owned = (epochMs) => epochMs > from && epochMs <= to;
    this.#rounds = source.rounds.filter(
      (round) => round.lastMidEpochMs >= from - reachMs && round.firstMidEpochMs <= to + reachMs,
    );
    this.integrator = new RadarIntegrator(job.steps, source.time, {
      cellCount: shape.grid.nx * shape.grid.ny,
      headlineCells: shape.headlineCells,
      variantCount: shape.variants.length,
    });
  }

  /** Earliest instant of the layer that comes next; Infinity when there is none. */
  get nextEpochMs(): number {
    return this.#rounds[this.#next]?.firstMidEpochMs ?? Infinity;
  }

  /** Decodes the next layer and adds it: a depth as its mean rate, from its start to its end and no further. */
  async advance(counts: UnitCounts, notices: SweepFault[]): Promise<void> {
    const round = this.#rounds[this.#next++];
    let layer: RateLayer;
    try {
      layer = await this.#layer(round, counts);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      const where = error.where.replace(round.path, () => round.name);
      notices.push({ what: error.what, where, fix: error.fix, file: round.name });
      return;
    }
    if (this.#source.quantity !== "depthMm") {
      this.integrator.add(layer, round);
      return;
    }
    this.integrator.add(layer, { ...round, startsAnew: true });
    this.integrator.add({ ...layer, sweepMidEpochMs: [round.lastMidEpochMs] }, round);
  }

  async #layer(round: JobLayer, counts: UnitCounts): Promise<RateLayer> {
    const { grid, headlineCells, variants } = this.#shape;
    const file = await openGridded(round.path, round.options);
    if (file === undefined)
      throw new InputError(
        "it holds no gridded rain any more",
        round.path,
        "leave it as it is while a run lasts",
      );
    let scan: GriddedScan;
    try {
      scan = await file.readLayer(round.index);
    } finally {
      file.close();
    }
    const lookup: CellLookup = layerLookup(grid, this.#source, scan);
    const relation = this.#rates?.relationAt(round.firstMidEpochMs);
    const rates = this.#ratesOf(scan, round, relation);
    // Rain that came as rain is the same under every relation.
    const others = variants.map((variant) =>
      this.#rates === undefined ? rates : this.#ratesOf(scan, round, variant),
    );
    const builder = new RateLayerBuilder(grid.nx * grid.ny, headlineCells, variants.length);
    builder.add(lookup, rates, others, round.firstMidEpochMs);
    if (this.#owned(round.lastMidEpochMs)) {
      counts.gridLayersDecoded++;
      counts.gridCellsRead += scan.values.length;
      counts.gridCellsCapped += countCapped(rates);
    }
    const layer = builder.finish();
    this.#trace?.grid?.({ source: this.#source, round, scan, lookup, gates: rates, relation, layer });
    return layer;
  }

  #ratesOf({ values, origin }: GriddedScan, round: JobLayer, relation: ZrRelation | undefined): GateRates {
    const conversion = this.#source.conversion;
    if (this.#rates !== undefined && conversion !== undefined && relation !== undefined) {
      const moment = { quantity: conversion.moment, stored: values, gain: 1, offset: 0 };
      const moments = new Map([[conversion.moment, moment]]);
      return this.#rates.rates({ moments }, relation, `${round.name}, ${origin.dataset}`);
    }
    const hours = (round.lastMidEpochMs - round.firstMidEpochMs) / MS_PER_HOUR;
    const rateMmPerHour = this.#source.quantity === "depthMm" ? values.map((mm) => mm / hours) : values;
    return { codes: undefined, rateMmPerHour, capped: new Uint8Array(values.length) };
  }
}
