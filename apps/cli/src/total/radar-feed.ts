import { RadarIntegrator } from "@rainreckon/accumulation";
import type { PolarEcho, ZrRelation } from "@rainreckon/core";
import { type GateRates, type PolarLookup, type RateLayer, RateLayerBuilder } from "@rainreckon/mosaic";
import { COMPANIONS } from "./companions.ts";
import { EchoWork } from "./echo-work.ts";
import type {
  JobRadar,
  JobRound,
  JobSweep,
  RatesMade,
  RunShape,
  SweepFault,
  UnitCounts,
  UnitJob,
  UnitTrace,
} from "./job.ts";
import { lookupShelf } from "./lookup-shelf.ts";
import { countCapped, RateMaker } from "./rate-maker.ts";
import { RoundEchoes } from "./round-echoes.ts";

/** What one sweep says, by gate: under the relation in use, and under each other one. */
interface SweepRain {
  readonly gates: GateRates;
  readonly others: readonly GateRates[];
  readonly gateCount: number;
  /** Both undefined where the stored numbers went straight to rain. */
  readonly echo: PolarEcho | undefined;
  readonly made: RatesMade | undefined;
}

/** One radar inside a unit: its rounds in time order, decoded one at a time. */
export class RadarFeed {
  readonly integrator: RadarIntegrator;
  readonly #radar: JobRadar;
  readonly #rounds: readonly JobRound[];
  readonly #rates: RateMaker;
  readonly #echoes: EchoWork | undefined;
  readonly #shape: RunShape;
  readonly #owned: (epochMs: number) => boolean;
  readonly #trace: UnitTrace | undefined;
  #next = 0;

  /** @param trace - is told of every sweep that speaks, and of every layer */
  constructor(radar: JobRadar, shape: RunShape, job: UnitJob, trace?: UnitTrace) {
    const from = job.steps[0].startEpochMs;
    const to = job.steps[job.steps.length - 1].endEpochMs;
    const reachMs = Math.max(radar.time.maxGapMs, radar.time.medianRoundMs / 2);
    this.#radar = radar;
    this.#shape = shape;
    this.#rates = new RateMaker(radar);
    this.#echoes = radar.echo === undefined ? undefined : new EchoWork(radar, radar.echo, shape);
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
    return this.#rates.relationAt(epochMs);
  }

  /** Decodes the next round and adds it. */
  advance(counts: UnitCounts, notices: SweepFault[]): void {
    const round = this.#rounds[this.#next++];
    const layer = this.#layer(round, counts, notices);
    if (layer === undefined) return;
    this.integrator.add(layer, round);
    this.#trace?.layer?.(this.#radar, round, layer);
  }

  #layer(round: JobRound, counts: UnitCounts, notices: SweepFault[]): RateLayer | undefined {
    const { grid, headlineCells, variants } = this.#shape;
    const builder = new RateLayerBuilder(grid.nx * grid.ny, headlineCells, variants.length, COMPANIONS);
    const echoes = new RoundEchoes(this.#radar, round, (fault) => notices.push(fault));
    let spoken = 0;
    try {
      for (const sweep of round.sweeps) {
        try {
          spoken += this.#addSweep(builder, echoes, sweep, spoken > 0, counts);
        } catch (error) {
          echoes.tell(sweep, error);
        }
      }
    } finally {
      echoes.close();
    }
    return builder.isEmpty ? undefined : builder.finish();
  }

  #addSweep(
    builder: RateLayerBuilder,
    echoes: RoundEchoes,
    sweep: JobSweep,
    higher: boolean,
    counts: UnitCounts,
  ): number {
    const lookup = lookupShelf(this.#shape.grid, this.#radar).forSweep(echoes.shape(sweep));
    if (!builder.canFill(lookup)) return 0;
    const rain =
      this.#echoes === undefined ? this.#plainRain(echoes, sweep) : this.#rain(echoes, sweep, lookup);
    if (rain === undefined) return 0;
    const filled = builder.add(lookup, rain.gates, rain.others, sweep.midEpochMs);
    this.#trace?.sweep?.({
      radar: this.#radar,
      sweep,
      lookup,
      gates: rain.gates,
      relation: this.#rates.relationAt(sweep.midEpochMs),
      echo: rain.echo,
      made: rain.made,
      stored: () => echoes.plain(sweep),
    });
    if (this.#owned(sweep.midEpochMs)) {
      counts.sweepsDecoded++;
      counts.gatesRead += rain.gateCount;
      counts.gatesCapped += countCapped(rain.gates);
      if (higher) counts.cellsFilledByHigherSweep += filled;
      if (rain.echo !== undefined) this.#echoes?.count(rain.echo, counts);
    }
    return filled;
  }

  /** From stored numbers to rain through a table: nothing is screened or corrected. */
  #plainRain(echoes: RoundEchoes, sweep: JobSweep): SweepRain {
    const decoded = echoes.plain(sweep);
    const where = `${sweep.name}, ${decoded.origin.dataset}`;
    return {
      gates: this.#rates.rates(decoded, this.#rates.relationAt(sweep.midEpochMs), where),
      others: this.#shape.variants.map((variant) => this.#rates.rates(decoded, variant, where)),
      gateCount: decoded.rayCount * decoded.gateCount,
      echo: undefined,
      made: undefined,
    };
  }

  #rain(echoes: RoundEchoes, sweep: JobSweep, lookup: PolarLookup): SweepRain | undefined {
    const echo = echoes.echo(sweep);
    if (echo === undefined || this.#echoes === undefined) return undefined;
    const { gates, others, made } = this.#echoes.rain(
      echo,
      echoes.above(sweep),
      lookup,
      this.#rates.relationAt(sweep.midEpochMs),
    );
    return { gates, others, gateCount: echo.dbz.length, echo, made };
  }
}
