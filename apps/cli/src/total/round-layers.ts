import type { Grid, PolarEcho, ZrRelation } from "@rainreckon/core";
import {
  type GateRates,
  type PolarLookup,
  type RateLayer,
  RateLayerBuilder,
  type VariantRates,
} from "@rainreckon/mosaic";
import { COMPANIONS } from "./companions.ts";
import { EchoWork } from "./echo-work.ts";
import type { JobRadar, JobRound, JobSweep, RatesMade, SweepFault, UnitCounts, UnitTrace } from "./job.ts";
import { lookupShelf } from "./lookup-shelf.ts";
import { countCapped, RateMaker } from "./rate-maker.ts";
import { RoundEchoes } from "./round-echoes.ts";

/** What one sweep says, by gate: under the relation in use, and under each other one. */
interface SweepRain {
  readonly gates: GateRates;
  readonly others: readonly VariantRates[];
  readonly gateCount: number;
  /** Both undefined where the stored numbers went straight to rain. */
  readonly echo: PolarEcho | undefined;
  readonly made: RatesMade | undefined;
}

/** What of a run the layers of a radar depend on. */
export interface LayerShape {
  readonly grid: Grid;
  readonly variants: readonly ZrRelation[];
  readonly headlineCells: Int32Array;
}

/** Puts the rounds of one radar on the grid: its sweeps are decoded, worked on and turned into rain, lowest first. */
export class RoundLayers {
  readonly #radar: JobRadar;
  readonly #rates: RateMaker;
  readonly #echoes: EchoWork | undefined;
  readonly #shape: LayerShape;
  readonly #trace: UnitTrace | undefined;

  /** @param trace - is told of every sweep that speaks */
  constructor(radar: JobRadar, shape: LayerShape, trace?: UnitTrace) {
    this.#radar = radar;
    this.#shape = shape;
    this.#rates = new RateMaker(radar);
    this.#echoes = radar.echo === undefined ? undefined : new EchoWork(radar, radar.echo, shape);
    this.#trace = trace;
  }

  relationAt(epochMs: number): ZrRelation {
    return this.#rates.relationAt(epochMs);
  }

  /**
   * @param counts - what is read and done is added to it, for sweeps that `counted` says yes to
   * @returns undefined where nothing of the round speaks for the grid
   */
  layer(
    round: JobRound,
    counts: UnitCounts,
    onFault: (fault: SweepFault) => void,
    counted: (midEpochMs: number) => boolean = () => true,
  ): RateLayer | undefined {
    const { grid, headlineCells, variants } = this.#shape;
    const builder = new RateLayerBuilder(grid.nx * grid.ny, headlineCells, variants.length, COMPANIONS);
    const echoes = new RoundEchoes(this.#radar, round, onFault);
    let spoken = 0;
    try {
      for (const sweep of round.sweeps) {
        try {
          const own = counted(sweep.midEpochMs) ? counts : undefined;
          spoken += this.#addSweep(builder, echoes, sweep, spoken > 0, own);
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
    counts: UnitCounts | undefined,
  ): number {
    const lookup = lookupShelf(this.#shape.grid, this.#radar).forSweep(echoes.shape(sweep));
    if (!builder.canFill(lookup)) return 0;
    const rain =
      this.#echoes === undefined
        ? this.#plainRain(echoes, sweep)
        : this.#rain(builder, echoes, sweep, lookup);
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
    if (counts !== undefined) {
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

  #rain(
    builder: RateLayerBuilder,
    echoes: RoundEchoes,
    sweep: JobSweep,
    lookup: PolarLookup,
  ): SweepRain | undefined {
    const echo = echoes.echo(sweep);
    if (echo === undefined || this.#echoes === undefined) return undefined;
    const { gates, others, made } = this.#echoes.rain(
      echo,
      echoes.above(sweep),
      lookup,
      this.#rates.relationAt(sweep.midEpochMs),
      builder.headlineGates(lookup),
    );
    return { gates, others, gateCount: echo.dbz.length, echo, made };
  }
}
