import { LEAST_WEIGHT } from "./blend-weight.ts";
import { CellTolls } from "./cell-tolls.ts";
import {
  gatherCapped,
  gatherMean,
  gatherRates,
  gatherVariant,
  isDryWhere,
  type OwnCells,
} from "./gather-gates.ts";
import { headlinePositions } from "./headline-positions.ts";

/**
 * How a value travels with the rain from gate to total.
 *
 * - `depth`: its mean is weighted by depth (decibels added, share from hail);
 * - `time`: its mean is weighted by the time observed (share of the beam that is blocked);
 * - `toll`: a rate in mm h-1 of rain that is not there, because its gates were screened. It adds up to a depth
 *   beside the total, also where nobody observed.
 */
export type CompanionKind = "depth" | "time" | "toll";

/** One of the values that travel with the rain; every array of companions is in the order of one list of them. */
export interface CompanionValue {
  readonly kind: CompanionKind;
}

/** Which values of a source (gates of a sweep, cells of a gridded layer) make which cell of a grid. */
export interface CellLookup {
  /** Shape [m]: flat cell indices, ascending. */
  readonly cells: Int32Array;
  /** Shape [m + 1]: values of cells[k] are gates[start[k]] … gates[start[k + 1] - 1]. */
  readonly start: Int32Array;
  /** Flat indices of the source's values. */
  readonly gates: Int32Array;
  /** Shape [ny * nx]: position of a cell in `cells`, -1 where the source does not speak. */
  readonly position: Int32Array;
  /** Shape [ny * nx]: beam centre above mean sea level, NaN where there is none or none is known. */
  readonly beamHeightAslM: Float32Array;
  /** Shape [ny * nx]: blend weight, 0 where the source does not speak. */
  readonly weight: Float32Array;
}

/**
 * Gate values ready to be gathered: either stored codes with a table of rates, or rates already.
 * NaN is nodata; 0 is no rain, undetect among it.
 */
export interface GateRates {
  /** Shape [rayCount * gateCount]: codes to look up, or undefined where `rate` is per gate. */
  readonly codes: Uint8Array | Uint16Array | undefined;
  /** Rate by code, mm h-1; or by gate where there are no codes. */
  readonly rateMmPerHour: Float32Array;
  /** 1 where the hail cap was met, by code or by gate likewise. */
  readonly capped: Uint8Array;
  /** By gate, 0 to 1, known wherever the gate speaks: multiplies the blend weight. Undefined is 1. */
  readonly trust?: Float32Array | undefined;
  /**
   * By companion, then by gate; undefined is 0 at every gate. NaN counts as 0. A toll is above 0 where its gate
   * was screened, whether that gate was filled and speaks or not.
   */
  readonly companions?: readonly (Float32Array | undefined)[] | undefined;
}

/** Gate values under another relation; only its rates are asked for. */
export type VariantRates = Pick<GateRates, "codes" | "rateMmPerHour">;

/** Rain rate of one radar in one round, on the grid. Shapes [ny * nx] unless said otherwise. */
export interface RateLayer {
  /** Mid-times of the sweeps that spoke: a cell's instant is sweepMidEpochMs[slot[cell]]. */
  readonly sweepMidEpochMs: readonly number[];
  /** Which sweep spoke for a cell; undefined where the first one spoke for all. */
  readonly slot: Uint8Array | undefined;
  /** Mean rain rate of the gates in the cell; NaN is not observed. */
  readonly rateMmPerHour: Float32Array;
  /** The part of that rate that comes from gates at the cap; undefined where no gate met it. */
  readonly cappedRateMmPerHour: Float32Array | undefined;
  readonly beamHeightAslM: Float32Array;
  readonly weight: Float32Array;
  /** Shape [variants][headline cells]: the rate under other relations, at the cells the headline is made of. */
  readonly variants: readonly Float32Array[];
  /**
   * Shape [companions][cells], undefined where 0 everywhere. Of kind `depth` the mean over the gates of rate times
   * value, mm h-1 times its unit; of kind `time` the mean over the gates; of kind `toll` a rate, mm h-1, which may
   * stand in cells that were not observed.
   */
  readonly companions?: readonly (Float32Array | undefined)[] | undefined;
}

/**
 * Builds the layer of one round from its sweeps, lowest first: each cell is spoken for by the lowest
 * sweep that observed it. Later sweeps fill only what is still not observed, so a caller may stop as
 * soon as `canFill` says that a sweep has nothing to add, before it decodes it.
 */
export class RateLayerBuilder {
  readonly #rate: Float32Array;
  /** Position of a cell among the headline's, -1 for none; undefined where all cells are, in their order. */
  readonly #headlineAt: Int32Array | undefined;
  readonly #variants: Float32Array[];
  readonly #kinds: readonly CompanionKind[];
  readonly #companions: (Float32Array | undefined)[];
  readonly #mids: number[] = [];
  readonly #lookups: CellLookup[] = [];
  #slot: Uint8Array | undefined;
  #capped: Float32Array | undefined;
  #trust: Float32Array | undefined;
  readonly #tolls: CellTolls;
  #spoken = 0;
  /** Room for the cells that a sweep speaks for. */
  #room = new Int32Array(0);

  /**
   * @param headlineCells - flat cell indices, each once, at which rates under other relations are kept
   * @param variantCount - how many other relations
   * @param companions - what travels with the rates
   */
  constructor(
    cellCount: number,
    headlineCells: Int32Array,
    variantCount: number,
    companions: readonly CompanionValue[] = [],
  ) {
    this.#rate = new Float32Array(cellCount).fill(Number.NaN);
    this.#headlineAt = headlinePositions(headlineCells, cellCount);
    this.#variants = Array.from({ length: variantCount }, () =>
      new Float32Array(headlineCells.length).fill(Number.NaN),
    );
    this.#kinds = companions.map(({ kind }) => kind);
    this.#companions = companions.map(() => undefined);
    this.#tolls = new CellTolls(cellCount);
  }

  /** True while no cell was spoken for and no screened gate was met: the round has nothing to tell. */
  get isEmpty(): boolean {
    return this.#spoken === 0 && !this.#tolls.any;
  }

  /** True where a sweep of this geometry could speak for a cell that nobody has spoken for. */
  canFill(lookup: CellLookup): boolean {
    const { cells } = lookup;
    if (this.#spoken === 0) return cells.length > 0;
    for (let at = 0; at < cells.length; at++) if (Number.isNaN(this.#rate[cells[at]])) return true;
    return false;
  }

  /** Gates of a sweep that may be asked for under other relations: those of the headline's cells that nobody has spoken for. */
  headlineGates({ cells, start, gates }: CellLookup): Int32Array {
    const asked = new Int32Array(gates.length);
    let count = 0;
    for (let at = 0; at < cells.length; at++) {
      const cell = cells[at];
      const isHeadline = this.#headlineAt === undefined || this.#headlineAt[cell] >= 0;
      if (!isHeadline || !Number.isNaN(this.#rate[cell])) continue;
      for (let k = start[at]; k < start[at + 1]; k++) asked[count++] = gates[k];
    }
    return asked.subarray(0, count);
  }

  /**
   * Adds a sweep; sweeps come in ascending elevation.
   *
   * @param gates - its gate values under the relation in use
   * @param variants - its gate values under each other relation, same coding; a gate speaks under all or under none.
   *   Only those of {@link headlineGates} are looked at
   * @returns number of cells it speaks for
   */
  add(lookup: CellLookup, gates: GateRates, variants: readonly VariantRates[], midEpochMs: number): number {
    const slotIndex = this.#mids.length;
    const rate = this.#rate;
    if (this.#room.length < lookup.cells.length) this.#room = new Int32Array(lookup.cells.length);
    const own = gatherRates(lookup, gates, rate, this.#room);
    if (slotIndex > 0 && own.count > 0) {
      this.#slot ??= new Uint8Array(rate.length);
      for (let o = 0; o < own.count; o++) this.#slot[lookup.cells[own.own[o]]] = slotIndex;
    }
    this.#spoken += own.count;
    if (own.anyCapped) {
      this.#capped ??= new Float32Array(rate.length);
      gatherCapped(lookup, gates, own, this.#capped);
    }
    for (let v = 0; v < variants.length; v++) {
      const dryTogether = isDryWhere(gates.rateMmPerHour, variants[v].rateMmPerHour);
      gatherVariant(lookup, variants[v], own, rate, dryTogether, this.#headlineAt, this.#variants[v]);
    }
    if (gates.trust !== undefined) {
      this.#trust = gatherMean(lookup, gates, own, gates.trust, rate, false, 1, this.#trust);
    }
    if (gates.companions !== undefined) this.#addCompanions(lookup, gates, gates.companions, own, slotIndex);
    this.#mids.push(midEpochMs);
    this.#lookups.push(lookup);
    return own.count;
  }

  finish(): RateLayer {
    const slot = this.#slot;
    const trust = this.#trust;
    const first = this.#lookups[0];
    let beamHeightAslM = first?.beamHeightAslM ?? new Float32Array(this.#rate.length).fill(Number.NaN);
    let weight = first?.weight ?? new Float32Array(this.#rate.length);
    if (slot !== undefined) {
      beamHeightAslM = beamHeightAslM.slice();
      weight = weight.slice();
      for (let cell = 0; cell < slot.length; cell++) {
        if (slot[cell] === 0) continue;
        beamHeightAslM[cell] = this.#lookups[slot[cell]].beamHeightAslM[cell];
        weight[cell] = this.#lookups[slot[cell]].weight[cell];
      }
    }
    if (trust !== undefined) {
      weight = weight.slice();
      for (let cell = 0; cell < weight.length; cell++) {
        if (weight[cell] > 0) weight[cell] = Math.max(LEAST_WEIGHT, weight[cell] * trust[cell]);
      }
    }
    return {
      sweepMidEpochMs: this.#mids,
      slot,
      rateMmPerHour: this.#rate,
      cappedRateMmPerHour: this.#capped,
      beamHeightAslM,
      weight,
      variants: this.#variants,
      companions: this.#companions,
    };
  }

  #addCompanions(
    lookup: CellLookup,
    gates: GateRates,
    values: readonly (Float32Array | undefined)[],
    own: OwnCells,
    slotIndex: number,
  ): void {
    const [rate, slot] = [this.#rate, this.#slot];
    const tolls: number[] = [];
    for (let c = 0; c < this.#kinds.length; c++) {
      const ofGates = values[c];
      if (ofGates === undefined) continue;
      const kind = this.#kinds[c];
      if (kind === "toll") tolls.push(c);
      else {
        const plane = this.#companions[c];
        this.#companions[c] = gatherMean(lookup, gates, own, ofGates, rate, kind === "depth", 0, plane);
      }
    }
    if (tolls.length === 0) return;
    // A cell that a lower sweep speaks for would not have been looked at.
    const isLowest = (cell: number) =>
      Number.isNaN(rate[cell]) || (slot === undefined ? 0 : slot[cell]) === slotIndex;
    this.#tolls.add(lookup, gates, values, tolls, isLowest, this.#companions);
  }
}
