import { type BlendedStep, contributionsAt, type RadarInStep } from "@rainreckon/accumulation";
import { type Interval, markBit, momentValue } from "@rainreckon/core";
import type { RateLayer } from "@rainreckon/mosaic";
import type { JobRadar, JobRound, SpokenGrid, SpokenSweep, UnitTrace } from "../total/job.ts";

/** What no relation for rain is made for. */
const NO_PLAIN_RAIN = markBit("hail") | markBit("melting") | markBit("snow");

/** Gates of one scan that speak for a cell: those with echo, and how many there are in all. */
interface CellGates {
  readonly dbz: readonly number[];
  /** For each of them, whether it is hail, melting or snow. */
  readonly doubtful: readonly boolean[];
  readonly speaking: number;
}

/**
 * Corrected reflectivity that made the rain at one place, step by step: each gate of each scan with the time it counts
 * for, so that the depth of a step is the sum of hours × rate under any relation and cap.
 */
export class PlaceEcho {
  readonly #start: number[] = [0];
  readonly #dbz: number[] = [];
  readonly #hours: number[] = [];
  readonly #doubtful: boolean[] = [];
  readonly #observed: number[] = [];

  /** Shape [steps]: share of each step that was observed with a reflectivity. */
  get observedFraction(): Float64Array {
    return Float64Array.from(this.#observed);
  }

  get stepCount(): number {
    return this.#observed.length;
  }

  add(dbz: number, hours: number, doubtful: boolean): void {
    this.#dbz.push(dbz);
    this.#hours.push(hours);
    this.#doubtful.push(doubtful);
  }

  /** @param known - false where a source without reflectivity spoke too: the step then counts as not observed */
  endStep(observedFraction: number, known: boolean): void {
    if (!known) {
      const begin = this.#start[this.#start.length - 1] as number;
      this.#dbz.length = begin;
      this.#hours.length = begin;
      this.#doubtful.length = begin;
    }
    this.#start.push(this.#dbz.length);
    this.#observed.push(known ? observedFraction : 0);
  }

  /**
   * Integral over each step of a value of reflectivity, value times hours. Below detection counts 0.
   *
   * @param quantityOf - of dBZ
   * @param doubtfulOnly - only gates of hail, melting or snow
   * @returns shape [steps]: NaN where not observed
   */
  integral(quantityOf: (dbz: number) => number, doubtfulOnly = false): Float64Array {
    return Float64Array.from(this.#observed, (observed, step) => {
      if (!(observed > 0)) return Number.NaN;
      let sum = 0;
      for (let k = this.#start[step] as number; k < (this.#start[step + 1] as number); k++) {
        if (doubtfulOnly && this.#doubtful[k] !== true) continue;
        sum += (this.#hours[k] as number) * quantityOf(this.#dbz[k] as number);
      }
      return sum;
    });
  }
}

/** Listens to units of work and keeps the reflectivity that made the depth at some places. */
export class PlaceTracer implements UnitTrace {
  /** In the order of the places. */
  readonly echoes: readonly PlaceEcho[];
  /** Shape [places]: the cells that stand for each. */
  readonly #places: readonly (readonly number[])[];
  /** All those cells, each once. */
  readonly #cells: readonly number[];
  readonly #indexOf: ReadonlyMap<number, number>;
  readonly #heard = new Map<JobRadar, { sweep: SpokenSweep["sweep"]; gates: (CellGates | undefined)[] }[]>();
  /** By the array of rates that a layer keeps through the integration; undefined where it came as rain. */
  readonly #gatesOfRates = new WeakMap<Float32Array, readonly (CellGates | undefined)[]>();

  constructor(places: readonly (readonly number[])[]) {
    this.#places = places;
    this.#cells = [...new Set(places.flat())];
    this.#indexOf = new Map(this.#cells.map((cell, k) => [cell, k]));
    this.echoes = places.map(() => new PlaceEcho());
  }

  sweep(spoken: SpokenSweep): void {
    const { radar, sweep, lookup, gates, echo } = spoken;
    const heard = this.#heard.get(radar) ?? [];
    this.#heard.set(radar, heard);
    const reaches = this.#cells.some((cell) => (lookup.position[cell] as number) >= 0);
    let dbzOf: (gate: number) => number = () => Number.NaN;
    if (reaches && echo !== undefined) dbzOf = (gate) => echo.dbz[gate] as number;
    else if (reaches) {
      const moment = spoken.stored().moments.get(radar.moment);
      if (moment !== undefined)
        dbzOf = (gate) => momentValue(moment.stored[gate] as number, moment) + radar.offsetDb;
    }
    const ofCells = this.#cells.map((cell) => {
      const at = lookup.position[cell] as number;
      if (at < 0) return undefined;
      const own = lookup.gates.subarray(lookup.start[at], lookup.start[at + 1]);
      return cellGates(own, gates, dbzOf, (gate) => ((echo?.marks[gate] ?? 0) & NO_PLAIN_RAIN) !== 0);
    });
    heard.push({ sweep, gates: ofCells });
  }

  layer(radar: JobRadar, round: JobRound, layer: RateLayer): void {
    // A round that said nothing makes no layer; what was heard of it is still there.
    const heard = (this.#heard.get(radar) ?? []).filter(({ sweep }) => round.sweeps.includes(sweep));
    this.#heard.delete(radar);
    this.#gatesOfRates.set(
      layer.rateMmPerHour,
      this.#cells.map((cell, k) => heard[layer.slot?.[cell] ?? 0]?.gates[k]),
    );
  }

  grid({ source, scan, lookup, gates, layer }: SpokenGrid): void {
    const { conversion } = source;
    if (conversion === undefined) return;
    const dbzOf = (at: number) => (scan.values[at] as number) + conversion.offsetDb;
    this.#gatesOfRates.set(
      layer.rateMmPerHour,
      this.#cells.map((cell) => {
        const at = lookup.position[cell] as number;
        if (at < 0) return undefined;
        return cellGates(
          lookup.gates.subarray(lookup.start[at], lookup.start[at + 1]),
          gates,
          dbzOf,
          () => false,
        );
      }),
    );
  }

  step(span: Interval, step: number, sources: readonly RadarInStep[], blended: BlendedStep): void {
    const lengthMs = span.endEpochMs - span.startEpochMs;
    for (const [p, cells] of this.#places.entries()) {
      const echo = this.echoes[p] as PlaceEcho;
      const seen = cells.filter((cell) => !Number.isNaN(blended.depthMm[cell]));
      const observedMs = seen.reduce((sum, cell) => sum + (blended.observedMs[cell] as number), 0);
      let known = true;
      for (const cell of seen) {
        for (const { share, hours0, hours1, layer0, layer1 } of contributionsAt(span, step, cell, sources)) {
          const part = share / seen.length;
          known = this.#add(echo, cell, layer0, part * hours0) && known;
          known = this.#add(echo, cell, layer1, part * hours1) && known;
        }
      }
      echo.endStep(Math.min(1, observedMs / cells.length / lengthMs), known);
    }
  }

  /** @returns false where the layer has no reflectivity to give */
  #add(echo: PlaceEcho, cell: number, { rateMmPerHour }: RateLayer, hours: number): boolean {
    if (hours === 0) return true;
    const gates = this.#gatesOfRates.get(rateMmPerHour)?.[this.#indexOf.get(cell) as number];
    if (gates === undefined) return false;
    const each = hours / gates.speaking;
    for (const [k, dbz] of gates.dbz.entries()) echo.add(dbz, each, gates.doubtful[k] as boolean);
    return true;
  }
}

/** The gates that speak, by the rule of the layers: their rate is known. */
function cellGates(
  own: ArrayLike<number>,
  { codes, rateMmPerHour }: SpokenSweep["gates"],
  dbzOf: (gate: number) => number,
  isDoubtful: (gate: number) => boolean,
): CellGates {
  const dbz: number[] = [];
  const doubtful: boolean[] = [];
  let speaking = 0;
  for (let k = 0; k < own.length; k++) {
    const gate = own[k] as number;
    const rate = rateMmPerHour[codes === undefined ? gate : (codes[gate] as number)] as number;
    if (!(rate >= 0)) continue;
    speaking++;
    const value = dbzOf(gate);
    if (!(value > Number.NEGATIVE_INFINITY)) continue;
    dbz.push(value);
    doubtful.push(isDoubtful(gate));
  }
  return { dbz, doubtful, speaking };
}
