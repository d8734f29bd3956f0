import { type Grid, type Interval, MS_PER_HOUR } from "@rainreckon/core";

/** Areas that are looked at where nobody names others, km²; one cell always leads. House rule. */
export const USUAL_AREAS_KM2: readonly number[] = [5, 10, 25, 50, 100, 250, 500, 1000, 2500, 5000];

/** The largest mean depth over an area of a size, in a duration. */
export interface AreaMaximum extends Interval {
  readonly durationMs: number;
  /** Of the cells taken, so a whole number of them: the least that holds the area asked for. */
  readonly areaKm2: number;
  readonly depthMm: number;
  /** Cell in which the area has its deepest point. */
  readonly centreCell: number;
}

/** Depths of equal intervals on a grid, in time order. */
export interface IntervalDepths {
  readonly grid: Grid;
  /** Ascending, touching, of one length but for the last, which may be shorter. */
  readonly intervals: readonly Interval[];
  /** Shape [intervals][cells]: NaN is not observed, and adds nothing. */
  readonly depthMm: readonly ArrayLike<number>[];
}

/**
 * Depth–area–duration: for each duration the largest mean depth over areas of growing size, over all windows of whole
 * intervals. An area grows from the deepest cell of a window by the deepest cell that touches it by an edge, so it is
 * of one piece, as an area within an isohyet is; cells that were never observed take no part.
 *
 * @param durationsMs - those that are no whole number of intervals, or longer than all of them, are left out
 * @param areasKm2 - ascending; those larger than what was observed are left out
 * @remarks The table as such: WMO (1986), Manual for Estimation of Probable Maximum Precipitation, WMO-No. 332,
 * chapter 2 (from memory), which draws isohyets by hand. Growing by cells is our own: house rule.
 */
export function depthAreaDuration(
  { grid, intervals, depthMm }: IntervalDepths,
  durationsMs: readonly number[],
  areasKm2: readonly number[] = USUAL_AREAS_KM2,
): AreaMaximum[] {
  const cellKm2 = (grid.cellM * grid.cellM) / 1e6;
  const counts = [...new Set([1, ...areasKm2.map((km2) => Math.max(1, Math.ceil(km2 / cellKm2 - 1e-9)))])];
  const lengthMs =
    intervals[0] === undefined ? Number.NaN : intervals[0].endEpochMs - intervals[0].startEpochMs;
  const growth = new Growth(grid.nx, grid.ny, counts[counts.length - 1]);
  const found: AreaMaximum[] = [];
  for (const durationMs of durationsMs) {
    const n = durationMs / lengthMs;
    if (!Number.isInteger(n) || n < 1 || n > intervals.length) continue;
    const bestMm = counts.map(() => Number.NEGATIVE_INFINITY);
    const best: AreaMaximum[] = [];
    for (let first = 0; first + n <= intervals.length; first++) {
      const sum = sumOf(depthMm, first, n, grid.nx * grid.ny);
      const centreCell = deepestCell(sum);
      // No area can have a mean above its deepest cell.
      if (centreCell < 0 || bestMm.every((mm) => mm >= sum[centreCell])) continue;
      const means = growth.from(centreCell, sum);
      for (const [k, count] of counts.entries()) {
        const mean = means[count - 1];
        if (mean === undefined || !(mean > bestMm[k])) continue;
        bestMm[k] = mean;
        best[k] = {
          startEpochMs: intervals[first].startEpochMs,
          endEpochMs: intervals[first + n - 1].endEpochMs,
          durationMs,
          areaKm2: count * cellKm2,
          depthMm: mean,
          centreCell,
        };
      }
    }
    for (const one of best) if (one !== undefined) found.push(one);
  }
  return found;
}

/** Where a storm was centred: its deepest cell, and the middle of its rain. */
export interface StormCentre {
  readonly deepestCell: number;
  readonly deepestMm: number;
  /** Mean place of all rain, weighted by depth, in the grid's coordinates. */
  readonly centroidXM: number;
  readonly centroidYM: number;
}

/** @returns undefined where no cell has any rain */
export function stormCentre(grid: Grid, depthMm: ArrayLike<number>): StormCentre | undefined {
  const deepest = deepestCell(depthMm);
  if (deepest < 0 || !(depthMm[deepest] > 0)) return undefined;
  let [sum, column, row] = [0, 0, 0];
  for (let cell = 0; cell < depthMm.length; cell++) {
    const mm = depthMm[cell];
    if (!(mm > 0)) continue;
    sum += mm;
    column += mm * (cell % grid.nx);
    row += mm * Math.floor(cell / grid.nx);
  }
  return {
    deepestCell: deepest,
    deepestMm: depthMm[deepest],
    centroidXM: grid.westM + (column / sum + 0.5) * grid.cellM,
    centroidYM: grid.northM - (row / sum + 0.5) * grid.cellM,
  };
}

/** Mean rate of a depth over a duration, mm/h. */
export function meanRateMmPerHour(depthMm: number, durationMs: number): number {
  return (depthMm * MS_PER_HOUR) / durationMs;
}

function sumOf(depthMm: readonly ArrayLike<number>[], first: number, n: number, cells: number): Float64Array {
  const sum = new Float64Array(cells).fill(Number.NaN);
  for (let i = first; i < first + n; i++) {
    const part = depthMm[i];
    for (let cell = 0; cell < cells; cell++) {
      const mm = part[cell];
      if (Number.isNaN(mm)) continue;
      sum[cell] = Number.isNaN(sum[cell]) ? mm : sum[cell] + mm;
    }
  }
  return sum;
}

function deepestCell(depthMm: ArrayLike<number>): number {
  let deepest = -1;
  for (let cell = 0; cell < depthMm.length; cell++) {
    if (!Number.isNaN(depthMm[cell]) && !(deepest >= 0 && depthMm[cell] <= depthMm[deepest])) deepest = cell;
  }
  return deepest;
}

/** Areas of one piece that grow by their deepest neighbour; arrays are made once and used for every window. */
class Growth {
  readonly #nx: number;
  readonly #ny: number;
  readonly #most: number;
  /** Number of the growth that last met a cell. */
  readonly #metIn: Int32Array;
  #round = 0;
  /** Cells at the edge of the area, the deepest first: a binary heap. */
  #heap: Int32Array;
  #size = 0;
  #depth: ArrayLike<number> = [];

  constructor(nx: number, ny: number, most: number) {
    this.#nx = nx;
    this.#ny = ny;
    this.#most = Math.min(most, nx * ny);
    this.#metIn = new Int32Array(nx * ny);
    this.#heap = new Int32Array(nx * ny);
  }

  /** @returns mean depth of the first 1, 2, 3 … cells; ends where no observed cell touches the area any more */
  from(centre: number, depth: ArrayLike<number>): Float64Array {
    this.#round++;
    this.#depth = depth;
    this.#size = 0;
    const means = new Float64Array(this.#most);
    let count = 0;
    let sum = 0;
    this.#meet(centre);
    while (this.#size > 0 && count < this.#most) {
      const cell = this.#pop();
      sum += depth[cell];
      means[count++] = sum / count;
      const column = cell % this.#nx;
      if (column > 0) this.#meet(cell - 1);
      if (column < this.#nx - 1) this.#meet(cell + 1);
      if (cell >= this.#nx) this.#meet(cell - this.#nx);
      if (cell < this.#nx * (this.#ny - 1)) this.#meet(cell + this.#nx);
    }
    return means.subarray(0, count);
  }

  #meet(cell: number): void {
    if (this.#metIn[cell] === this.#round || Number.isNaN(this.#depth[cell])) return;
    this.#metIn[cell] = this.#round;
    let k = this.#size++;
    while (k > 0) {
      const above = (k - 1) >> 1;
      if (!this.#isBefore(cell, this.#heap[above])) break;
      this.#heap[k] = this.#heap[above];
      k = above;
    }
    this.#heap[k] = cell;
  }

  #pop(): number {
    const top = this.#heap[0];
    const last = this.#heap[--this.#size];
    let k = 0;
    for (;;) {
      let below = 2 * k + 1;
      if (below >= this.#size) break;
      if (below + 1 < this.#size && this.#isBefore(this.#heap[below + 1], this.#heap[below])) below++;
      if (!this.#isBefore(this.#heap[below], last)) break;
      this.#heap[k] = this.#heap[below];
      k = below;
    }
    this.#heap[k] = last;
    return top;
  }

  /** Of two equally deep cells the one with the lower index, so that nothing hangs on their order. */
  #isBefore(a: number, b: number): boolean {
    return this.#depth[a] > this.#depth[b] || (this.#depth[a] === this.#depth[b] && a < b);
  }
}
