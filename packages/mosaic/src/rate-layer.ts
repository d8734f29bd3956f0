import { LEAST_WEIGHT } from "./blend-weight.ts";

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
 *
 * The toll of a cell is that of the lowest sweep with a gate there that speaks or was screened, since that sweep
 * would have spoken had nothing been screened: the sum over its gates of what they would have made, by their number.
 */
export class RateLayerBuilder {
  readonly #rate: Float32Array;
  readonly #headlineCells: Int32Array;
  readonly #variants: Float32Array[];
  readonly #kinds: readonly CompanionKind[];
  readonly #companions: (Float32Array | undefined)[];
  readonly #mids: number[] = [];
  readonly #lookups: CellLookup[] = [];
  #slot: Uint8Array | undefined;
  #capped: Float32Array | undefined;
  #trust: Float32Array | undefined;
  /** 1 where a lower sweep had a screened gate. */
  #tolled: Uint8Array | undefined;
  #spoken = 0;

  /**
   * @param headlineCells - flat cell indices at which rates under other relations are kept
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
    this.#headlineCells = headlineCells;
    this.#variants = Array.from({ length: variantCount }, () =>
      new Float32Array(headlineCells.length).fill(Number.NaN),
    );
    this.#kinds = companions.map(({ kind }) => kind);
    this.#companions = companions.map(() => undefined);
  }

  /** True while no cell was spoken for and no screened gate was met: the round has nothing to tell. */
  get isEmpty(): boolean {
    return this.#spoken === 0 && this.#tolled === undefined;
  }

  /** True where a sweep of this geometry could speak for a cell that nobody has spoken for. */
  canFill(lookup: CellLookup): boolean {
    const { cells } = lookup;
    if (this.#spoken === 0) return cells.length > 0;
    for (let at = 0; at < cells.length; at++) if (Number.isNaN(this.#rate[cells[at]])) return true;
    return false;
  }

  /**
   * Adds a sweep; sweeps come in ascending elevation.
   *
   * @param gates - its gate values under the relation in use
   * @param variants - its gate values under each other relation, same coding; a gate speaks under all or under none
   * @returns number of cells it speaks for
   */
  add(lookup: CellLookup, gates: GateRates, variants: readonly GateRates[], midEpochMs: number): number {
    const slotIndex = this.#mids.length;
    const first = slotIndex === 0;
    const { cells, start, gates: gateIndex } = lookup;
    const { codes, rateMmPerHour, capped } = gates;
    const rate = this.#rate;
    let spoken = 0;
    let cappedSeen = false;
    for (let at = 0; at < cells.length; at++) {
      const cell = cells[at];
      if (!first && !Number.isNaN(rate[cell])) continue;
      let sum = 0;
      let count = 0;
      let cap = 0;
      for (let k = start[at]; k < start[at + 1]; k++) {
        const key = codes === undefined ? gateIndex[k] : codes[gateIndex[k]];
        const value = rateMmPerHour[key];
        // False for NaN: nodata stays out of the mean.
        if (value >= 0) {
          sum += value;
          count++;
          cap |= capped[key];
        }
      }
      if (count === 0) continue;
      rate[cell] = sum / count;
      if (cap !== 0) cappedSeen = true;
      if (!first) {
        this.#slot ??= new Uint8Array(rate.length);
        this.#slot[cell] = slotIndex;
      }
      spoken++;
    }
    this.#spoken += spoken;
    if (cappedSeen) this.#addCapped(lookup, gates, slotIndex);
    for (let v = 0; v < variants.length; v++) this.#addVariant(lookup, variants[v], v, slotIndex);
    if (gates.trust !== undefined) this.#addTrust(lookup, gates, gates.trust, slotIndex);
    if (gates.companions !== undefined) this.#addCompanions(lookup, gates, gates.companions, slotIndex);
    this.#mids.push(midEpochMs);
    this.#lookups.push(lookup);
    return spoken;
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
      weight = weight.map((own, cell) => (own > 0 ? Math.max(LEAST_WEIGHT, own * trust[cell]) : own));
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

  /** Whether the sweep in work, with this index, is the one that speaks for a cell. */
  #speaks(cell: number, slotIndex: number): boolean {
    return !Number.isNaN(this.#rate[cell]) && (this.#slot?.[cell] ?? 0) === slotIndex;
  }

  /** A second pass for the few sweeps with hail: the part of each mean that comes from capped gates. */
  #addCapped(lookup: CellLookup, { codes, rateMmPerHour, capped }: GateRates, slotIndex: number): void {
    this.#capped ??= new Float32Array(this.#rate.length);
    const { cells, start, gates } = lookup;
    for (let at = 0; at < cells.length; at++) {
      if (!this.#speaks(cells[at], slotIndex)) continue;
      let sum = 0;
      let count = 0;
      for (let k = start[at]; k < start[at + 1]; k++) {
        const key = codes === undefined ? gates[k] : codes[gates[k]];
        const value = rateMmPerHour[key];
        if (!(value >= 0)) continue;
        count++;
        if (capped[key] !== 0) sum += value;
      }
      this.#capped[cells[at]] = sum / count;
    }
  }

  #addVariant(
    lookup: CellLookup,
    { codes, rateMmPerHour }: GateRates,
    variant: number,
    slotIndex: number,
  ): void {
    const out = this.#variants[variant];
    for (let h = 0; h < this.#headlineCells.length; h++) {
      const cell = this.#headlineCells[h];
      const at = lookup.position[cell];
      if (at < 0 || (this.#slot?.[cell] ?? 0) !== slotIndex) continue;
      let sum = 0;
      let count = 0;
      for (let k = lookup.start[at]; k < lookup.start[at + 1]; k++) {
        const value = rateMmPerHour[codes === undefined ? lookup.gates[k] : codes[lookup.gates[k]]];
        if (!(value >= 0)) continue;
        sum += value;
        count++;
      }
      if (count > 0) out[h] = sum / count;
    }
  }

  /** Mean trust in the gates that speak for a cell. */
  #addTrust(
    { cells, start, gates }: CellLookup,
    { codes, rateMmPerHour }: GateRates,
    trust: Float32Array,
    slotIndex: number,
  ): void {
    for (let at = 0; at < cells.length; at++) {
      if (!this.#speaks(cells[at], slotIndex)) continue;
      let sum = 0;
      let count = 0;
      for (let k = start[at]; k < start[at + 1]; k++) {
        const gate = gates[k];
        if (!(rateMmPerHour[codes === undefined ? gate : codes[gate]] >= 0)) continue;
        sum += trust[gate];
        count++;
      }
      if (sum === count) continue;
      this.#trust ??= new Float32Array(this.#rate.length).fill(1);
      this.#trust[cells[at]] = sum / count;
    }
  }

  #addCompanions(
    lookup: CellLookup,
    gates: GateRates,
    values: readonly (Float32Array | undefined)[],
    slotIndex: number,
  ): void {
    const tolls: number[] = [];
    for (let c = 0; c < this.#kinds.length; c++) {
      const ofGates = values[c];
      if (ofGates === undefined) continue;
      if (this.#kinds[c] === "toll") tolls.push(c);
      else this.#addMean(lookup, gates, ofGates, c, slotIndex);
    }
    if (tolls.length > 0) this.#addTolls(lookup, gates, values, tolls, slotIndex);
  }

  /** A companion's mean over the gates that speak for a cell, by their rate where it goes by depth. */
  #addMean(
    { cells, start, gates }: CellLookup,
    { codes, rateMmPerHour }: GateRates,
    values: Float32Array,
    companion: number,
    slotIndex: number,
  ): void {
    const byDepth = this.#kinds[companion] === "depth";
    for (let at = 0; at < cells.length; at++) {
      const cell = cells[at];
      if (!this.#speaks(cell, slotIndex) || (byDepth && this.#rate[cell] === 0)) continue;
      let sum = 0;
      let count = 0;
      for (let k = start[at]; k < start[at + 1]; k++) {
        const gate = gates[k];
        const rate = rateMmPerHour[codes === undefined ? gate : codes[gate]];
        if (!(rate >= 0)) continue;
        count++;
        const value = values[gate];
        if (!Number.isNaN(value)) sum += byDepth ? rate * value : value;
      }
      if (sum === 0) continue;
      this.#companion(companion)[cell] = sum / count;
    }
  }

  #addTolls(
    { cells, start, gates }: CellLookup,
    { codes, rateMmPerHour }: GateRates,
    values: readonly (Float32Array | undefined)[],
    tolls: readonly number[],
    slotIndex: number,
  ): void {
    const screened = new Uint8Array(tolls.map((c) => values[c]?.length ?? 0)[0]);
    for (const c of tolls) {
      const ofGates = values[c] as Float32Array;
      for (let gate = 0; gate < ofGates.length; gate++) if (ofGates[gate] > 0) screened[gate] = 1;
    }
    const tolled = this.#tolled ?? new Uint8Array(this.#rate.length);
    for (let at = 0; at < cells.length; at++) {
      const cell = cells[at];
      let any = 0;
      for (let k = start[at]; k < start[at + 1]; k++) any |= screened[gates[k]];
      if (any === 0 || tolled[cell] !== 0) continue;
      if (!Number.isNaN(this.#rate[cell]) && !this.#speaks(cell, slotIndex)) continue;
      this.#tolled = tolled;
      tolled[cell] = 1;
      let count = 0;
      for (let k = start[at]; k < start[at + 1]; k++) {
        const gate = gates[k];
        if (screened[gate] !== 0 || rateMmPerHour[codes === undefined ? gate : codes[gate]] >= 0) count++;
      }
      for (const c of tolls) {
        const ofGates = values[c] as Float32Array;
        let sum = 0;
        for (let k = start[at]; k < start[at + 1]; k++) if (ofGates[gates[k]] > 0) sum += ofGates[gates[k]];
        if (sum > 0) this.#companion(c)[cell] = sum / count;
      }
    }
  }

  #companion(index: number): Float32Array {
    this.#companions[index] ??= new Float32Array(this.#rate.length);
    return this.#companions[index];
  }
}
