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
}

/**
 * Builds the layer of one round from its sweeps, lowest first: each cell is spoken for by the lowest
 * sweep that observed it. Later sweeps fill only what is still not observed, so a caller may stop as
 * soon as `canFill` says that a sweep has nothing to add, before it decodes it.
 */
export class RateLayerBuilder {
  readonly #rate: Float32Array;
  readonly #headlineCells: Int32Array;
  readonly #variants: Float32Array[];
  readonly #mids: number[] = [];
  readonly #lookups: CellLookup[] = [];
  #slot: Uint8Array | undefined;
  #capped: Float32Array | undefined;

  /**
   * @param headlineCells - flat cell indices at which rates under other relations are kept
   * @param variantCount - how many other relations
   */
  constructor(cellCount: number, headlineCells: Int32Array, variantCount: number) {
    this.#rate = new Float32Array(cellCount).fill(Number.NaN);
    this.#headlineCells = headlineCells;
    this.#variants = Array.from({ length: variantCount }, () =>
      new Float32Array(headlineCells.length).fill(Number.NaN),
    );
  }

  /** True where a sweep of this geometry could speak for a cell that nobody has spoken for. */
  canFill(lookup: CellLookup): boolean {
    if (this.#mids.length === 0) return lookup.cells.length > 0;
    for (const cell of lookup.cells) if (Number.isNaN(this.#rate[cell])) return true;
    return false;
  }

  /**
   * Adds a sweep; sweeps come in ascending elevation.
   *
   * @param gates - its gate values under the relation in use
   * @param variants - its gate values under each other relation, same coding
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
    if (cappedSeen) this.#addCapped(lookup, gates, slotIndex);
    for (let v = 0; v < variants.length; v++) this.#addVariant(lookup, variants[v], v, slotIndex);
    this.#mids.push(midEpochMs);
    this.#lookups.push(lookup);
    return spoken;
  }

  finish(): RateLayer {
    const single = this.#slot === undefined;
    const first = this.#lookups[0];
    let beamHeightAslM = first?.beamHeightAslM ?? new Float32Array(this.#rate.length).fill(Number.NaN);
    let weight = first?.weight ?? new Float32Array(this.#rate.length);
    if (!single) {
      beamHeightAslM = beamHeightAslM.slice();
      weight = weight.slice();
      const slot = this.#slot as Uint8Array;
      for (let cell = 0; cell < slot.length; cell++) {
        if (slot[cell] === 0) continue;
        beamHeightAslM[cell] = this.#lookups[slot[cell]].beamHeightAslM[cell];
        weight[cell] = this.#lookups[slot[cell]].weight[cell];
      }
    }
    return {
      sweepMidEpochMs: this.#mids,
      slot: this.#slot,
      rateMmPerHour: this.#rate,
      cappedRateMmPerHour: this.#capped,
      beamHeightAslM,
      weight,
      variants: this.#variants,
    };
  }

  /** A second pass for the few sweeps with hail: the part of each mean that comes from capped gates. */
  #addCapped(lookup: CellLookup, { codes, rateMmPerHour, capped }: GateRates, slotIndex: number): void {
    this.#capped ??= new Float32Array(this.#rate.length);
    const { cells, start, gates } = lookup;
    for (let at = 0; at < cells.length; at++) {
      if ((this.#slot?.[cells[at]] ?? 0) !== slotIndex) continue;
      let sum = 0;
      let count = 0;
      for (let k = start[at]; k < start[at + 1]; k++) {
        const key = codes === undefined ? gates[k] : codes[gates[k]];
        const value = rateMmPerHour[key];
        if (!(value >= 0)) continue;
        count++;
        if (capped[key] !== 0) sum += value;
      }
      if (count > 0) this.#capped[cells[at]] = sum / count;
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
}
