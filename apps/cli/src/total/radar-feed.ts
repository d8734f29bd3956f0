import { RadarIntegrator } from "@rainreckon/accumulation";
import type { ZrRelation } from "@rainreckon/core";
import { COMPANIONS } from "./companions.ts";
import type { JobRadar, JobRound, RunShape, SweepFault, UnitCounts, UnitJob, UnitTrace } from "./job.ts";
import { RoundLayers } from "./round-layers.ts";

/** One radar inside a unit: its rounds in time order, decoded one at a time. */
export class RadarFeed {
  readonly integrator: RadarIntegrator;
  readonly #radar: JobRadar;
  readonly #rounds: readonly JobRound[];
  readonly #layers: RoundLayers;
  readonly #owned: (epochMs: number) => boolean;
  readonly #trace: UnitTrace | undefined;
  #next = 0;

  /** @param trace - is told of every sweep that speaks, and of every layer */
  constructor(radar: JobRadar, shape: RunShape, job: UnitJob, trace?: UnitTrace) {
    const from = job.steps[0].startEpochMs;
    const to = job.steps[job.steps.length - 1].endEpochMs;
    const reachMs = Math.max(radar.time.maxGapMs, radar.time.medianRoundMs / 2);
    this.#radar = radar;
    this.#layers = new RoundLayers(radar, shape, trace);
    this.#owned = (epochMs) => epochMs > from && epochMs <= to;
    this.#trace = trace;
    this.#rounds = radar.rounds.filter(
      (round) => round.lastMidEpochMs >= from - reachMs && round.firstMidEpochMs <= to + reachMs,
    );
    this.integrator = new RadarIntegrator(job.steps, radar.time, {
      cellCount: shape.grid.nx * shape.grid.ny,
      headlineCells: shape.headlineCells,
      variantCount: shape.variants.length,
      companions: COMPANIONS,
    });
  }

  /** Earliest instant of the round that comes next; Infinity when there is none. */
  get nextEpochMs(): number {
    return this.#rounds[this.#next]?.firstMidEpochMs ?? Infinity;
  }

  relationAt(epochMs: number): ZrRelation {
    return this.#layers.relationAt(epochMs);
  }

  /** Decodes the next round and adds it. */
  advance(counts: UnitCounts, notices: SweepFault[]): void {
    const round = this.#rounds[this.#next++];
    const layer = this.#layers.layer(round, counts, (fault) => notices.push(fault), this.#owned);
    if (layer === undefined) return;
    this.integrator.add(layer, round);
    this.#trace?.layer?.(this.#radar, round, layer);
  }
}
