import { quotient } from "./numbers.ts";

/** Values in ascending order, with the places where runs of equal values end. */
interface Sorted {
  /** Shape [n]: indices of the values, ascending by value. */
  readonly order: Uint32Array;
  /** End (exclusive) of each run of equal values, ascending. */
  readonly runEnds: Uint32Array;
}

function sorted(values: Float64Array): Sorted {
  const order = Uint32Array.from(values.keys()).sort((a, b) => values[a] - values[b]);
  const runEnds: number[] = [];
  for (let i = 1; i <= order.length; i++) {
    if (i === order.length || values[order[i]] !== values[order[i - 1]]) runEnds.push(i);
  }
  return { order, runEnds: Uint32Array.from(runEnds) };
}

/** Average ranks of a sample in which each value occurs as often as its weight says; written into `ranks`. */
function averageRanks({ order, runEnds }: Sorted, weights: Float64Array, ranks: Float64Array): void {
  let before = 0;
  let start = 0;
  for (const end of runEnds) {
    let inRun = 0;
    for (let i = start; i < end; i++) inRun += weights[order[i]];
    const rank = before + (inRun + 1) / 2;
    for (let i = start; i < end; i++) ranks[order[i]] = rank;
    before += inRun;
    start = end;
  }
}

/**
 * Spearman's rank correlation with average ranks, for whole-number weights.
 *
 * Sorting happens once; each call then costs one pass, so that a thousand resamples stay cheap. Tips
 * make ties the rule, and with ties only the correlation of average ranks is right.
 *
 * @returns a function of weights (how often each pair occurs); NaN where a side is constant or n < 2
 */
export function rankCorrelator(x: Float64Array, y: Float64Array): (weights: Float64Array) => number {
  const sortedX = sorted(x);
  const sortedY = sorted(y);
  const ranksX = new Float64Array(x.length);
  const ranksY = new Float64Array(y.length);
  return (weights) => {
    averageRanks(sortedX, weights, ranksX);
    averageRanks(sortedY, weights, ranksY);
    let n = 0;
    for (const weight of weights) n += weight;
    // Average ranks always have this mean, ties or not.
    const mean = (n + 1) / 2;
    let xx = 0;
    let yy = 0;
    let xy = 0;
    for (let i = 0; i < weights.length; i++) {
      const dx = ranksX[i] - mean;
      const dy = ranksY[i] - mean;
      xx += weights[i] * dx * dx;
      yy += weights[i] * dy * dy;
      xy += weights[i] * dx * dy;
    }
    return quotient(xy, Math.sqrt(xx * yy));
  };
}

/** The median for whole-number weights, the mean of the middle two for an even count; NaN for none. Sorts once. */
export function medianFinder(values: Float64Array): (weights: Float64Array) => number {
  const { order } = sorted(values);
  return (weights) => {
    let n = 0;
    for (const weight of weights) n += weight;
    if (n === 0) return Number.NaN;
    const lowPlace = Math.floor((n + 1) / 2);
    const highPlace = Math.ceil((n + 1) / 2);
    let counted = 0;
    let low = Number.NaN;
    for (const i of order) {
      counted += weights[i];
      if (Number.isNaN(low) && counted >= lowPlace) low = values[i];
      if (counted >= highPlace) return (low + values[i]) / 2;
    }
    return Number.NaN;
  };
}
