import type { RateLayer } from "@rainreckon/mosaic";

/** Cells that share one stretch of time: the same layer before, and the same sweeps that spoke in both. */
export interface Join {
  /** Number of the layer at the beginning of the stretch. */
  readonly before: number;
  readonly fromEpochMs: number;
  readonly toEpochMs: number;
  readonly cells: Int32Array;
}

/** When a layer spoke for a cell. */
export function instantAt({ sweepMidEpochMs, slot }: RateLayer, cell: number): number {
  return sweepMidEpochMs[slot === undefined ? 0 : slot[cell]];
}

const NONE = -1;

/**
 * Sorts the cells of successive layers by the stretch that ends in the newest one, so that what holds for a stretch is
 * worked out once, and not for each cell.
 */
export class Joiner {
  /** Number of the layer that last spoke for a cell. */
  readonly #previous: Int32Array;
  /** For each cell, its place among the stretches of the layer in work. */
  readonly #joinOf: Int32Array;
  readonly #order: Int32Array;

  constructor(cellCount: number) {
    this.#previous = new Int32Array(cellCount).fill(NONE);
    this.#joinOf = new Int32Array(cellCount);
    this.#order = new Int32Array(cellCount);
  }

  /** Nothing speaks for the time between the layers so far and the next. */
  startAnew(): void {
    this.#previous.fill(NONE);
  }

  /**
   * Adds the layer of the next number. Cells of a stretch are in ascending order, and only valid until the next call.
   *
   * @param layers - by number, the new one last; undefined where nothing asks for a layer any more
   * @param maxGapMs - longest stretch that counts; equality counts
   */
  add(layers: readonly (RateLayer | undefined)[], maxGapMs: number): Join[] {
    const number = layers.length - 1;
    const layer = layers[number] as RateLayer;
    const { rateMmPerHour, slot } = layer;
    const previous = this.#previous;
    const joinOf = this.#joinOf;
    const found: { before: number; from: number; to: number; count: number }[] = [];
    const known = new Map<number, number>();
    let beforeOfRun = NONE;
    let slotsOfRun: Uint8Array | undefined;
    let keyOfRun = NONE;
    let join = NONE;
    for (let cell = 0; cell < previous.length; cell++) {
      joinOf[cell] = NONE;
      // False for NaN: not observed.
      if (!(rateMmPerHour[cell] >= 0)) continue;
      const before = previous[cell];
      previous[cell] = number;
      if (before === NONE) continue;
      if (before !== beforeOfRun) {
        beforeOfRun = before;
        slotsOfRun = layers[before]?.slot;
      }
      const slot0 = slotsOfRun === undefined ? 0 : slotsOfRun[cell];
      const slot1 = slot === undefined ? 0 : slot[cell];
      const key = (before * 256 + slot0) * 256 + slot1;
      if (key !== keyOfRun) {
        keyOfRun = key;
        const seen = known.get(key);
        join = seen ?? NONE;
        // A layer that is forgotten lies further back than any gap that is bridged.
        const from = layers[before]?.sweepMidEpochMs[slot0] ?? Number.NEGATIVE_INFINITY;
        const to = layer.sweepMidEpochMs[slot1];
        if (seen === undefined && to - from <= maxGapMs) {
          join = found.length;
          found.push({ before, from, to, count: 0 });
        }
        known.set(key, join);
      }
      if (join === NONE) continue;
      joinOf[cell] = join;
      found[join].count++;
    }
    return this.#sorted(found);
  }

  #sorted(found: readonly { before: number; from: number; to: number; count: number }[]): Join[] {
    const next = new Int32Array(found.length);
    let start = 0;
    const joins = found.map(({ before, from, to, count }, join): Join => {
      next[join] = start;
      const cells = this.#order.subarray(start, start + count);
      start += count;
      return { before, fromEpochMs: from, toEpochMs: to, cells };
    });
    const joinOf = this.#joinOf;
    for (let cell = 0; cell < joinOf.length; cell++) {
      if (joinOf[cell] !== NONE) this.#order[next[joinOf[cell]]++] = cell;
    }
    return joins;
  }
}
