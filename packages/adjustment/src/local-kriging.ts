import { choleskyInPlace, solveLowerInPlace, solveLowerRowsInPlace, solveUpperInPlace } from "./cholesky.ts";
import { covariance, type KrigingEstimate, type KrigingInput } from "./kriging.ts";

/** Ordinary kriging at a target from places around it. */
export interface LocalKriging {
  /** Side of the square tiles whose targets share their places. */
  readonly tileKm: number;
  /** Value and variance; the object is used again by the next call. */
  estimate(xKm: number, yKm: number): KrigingEstimate;
  /** The value alone. */
  value(xKm: number, yKm: number): number;
  /**
   * Value and variance of many targets at once, the same as `estimate` gives one by one; targets of one tile share
   * their equations, so this is the way to fill a grid.
   *
   * @param value - shape [targets], filled
   * @param variance - shape [targets], filled
   */
  estimateAll(
    xKm: Float64Array,
    yKm: Float64Array,
    value: Float64Array | Float32Array,
    variance: Float64Array | Float32Array,
  ): void;
}

/** Places that a tile is kriged from, so many at least. House rule: see the bench for what that costs in accuracy. */
const PLACES_PER_TILE = 80;
/** Side of a tile in mean distances of places. House rule. */
const TILE_SIDE = 0.5;
/** Targets that are solved for together. */
const BATCH = 256;
/** Factors of tiles that are kept: enough for targets that come row by row. */
const TILES_KEPT = 256;

interface Tile {
  readonly places: Int32Array;
  /** Shape [places]: what covariances to a target are multiplied by. */
  readonly dual: Float64Array;
  readonly lower: Float64Array;
  /** Shape [places]: ones, solved by the lower factor. */
  readonly ones: Float64Array;
}

/**
 * Ordinary kriging from the places around a target, for networks from which a grid cannot be filled by one system:
 * its variance would cost n² steps a cell.
 *
 * The mean, which every weight of ordinary kriging hangs on, comes from all places (generalised least squares, one
 * factor of n³/3 steps, for up to some 3,000 places); departures from it are kriged from the places around. The plane
 * is cut into square tiles, half as wide as places stand apart; all targets of a tile share one set of places and one
 * factor: the 80 nearest to its middle, and whatever else is among the nearest `neighbours` of any point in it. So
 * many reach far behind the places that screen the others, and the next tile's set says the same: no seam shows.
 *
 * @param neighbours - how many nearest places of every target take part at least
 * @returns "singular" where places coincide and carry no error
 */
export function localKriging(
  { places, values, model, errorVariance }: Omit<KrigingInput, "drift">,
  neighbours = 16,
): LocalKriging | "singular" {
  const n = values.length;
  const xKm = Float64Array.from(places.xKm);
  const yKm = Float64Array.from(places.yKm);
  const sill = model.nugget + model.partialSill;
  const errorOf = (i: number) => errorVariance?.[i] ?? 0;
  const system = (chosen: Int32Array): Float64Array => {
    const m = chosen.length;
    const matrix = new Float64Array(m * m);
    for (let a = 0; a < m; a++) {
      const i = chosen[a];
      for (let b = 0; b < a; b++) {
        const j = chosen[b];
        matrix[a * m + b] = covariance(model, xKm[i] - xKm[j], yKm[i] - yKm[j]);
      }
      matrix[a * m + a] = sill + errorOf(i);
    }
    return matrix;
  };
  const whole = system(Int32Array.from({ length: n }, (_, i) => i));
  if (!choleskyInPlace(whole, n)) return "singular";
  const allOnes = new Float64Array(n).fill(1);
  const allValues = Float64Array.from(values);
  solveLowerInPlace(whole, n, allOnes);
  solveLowerInPlace(whole, n, allValues);
  let onesSquared = 0;
  let mean = 0;
  for (let i = 0; i < n; i++) {
    onesSquared += allOnes[i] * allOnes[i];
    mean += allOnes[i] * allValues[i];
  }
  mean /= onesSquared;

  const tileKm = tileSideKm(xKm, yKm);
  const halfDiagonalKm = (tileKm * Math.SQRT2) / 2;
  const squared = new Float64Array(n);
  const nearestTo = (x: number, y: number): Int32Array => {
    for (let i = 0; i < n; i++) squared[i] = (xKm[i] - x) ** 2 + (yKm[i] - y) ** 2;
    const ordered = squared.slice().sort();
    const mustHold = Math.sqrt(ordered[Math.min(neighbours, n) - 1]) + 2 * halfDiagonalKm;
    const limit = Math.max(ordered[Math.min(PLACES_PER_TILE, n) - 1], mustHold * mustHold);
    const chosen: number[] = [];
    for (let i = 0; i < n; i++) if (squared[i] <= limit) chosen.push(i);
    return Int32Array.from(chosen);
  };
  const makeTile = (column: number, row: number): Tile => {
    const chosen = nearestTo((column + 0.5) * tileKm, (row + 0.5) * tileKm);
    const m = chosen.length;
    const lower = system(chosen);
    choleskyInPlace(lower, m);
    const ones = new Float64Array(m).fill(1);
    const dual = Float64Array.from(chosen, (i) => values[i] - mean);
    solveLowerInPlace(lower, m, ones);
    solveLowerInPlace(lower, m, dual);
    solveUpperInPlace(lower, m, dual);
    return { places: chosen, dual, lower, ones };
  };
  const kept = new Map<string, Tile>();
  const tileAt = (column: number, row: number): Tile => {
    const key = `${column} ${row}`;
    const known = kept.get(key) ?? makeTile(column, row);
    // Taken out and put back: the one that was not asked for longest stands first.
    kept.delete(key);
    kept.set(key, known);
    for (const oldest of kept.keys()) {
      if (kept.size <= TILES_KEPT) break;
      kept.delete(oldest);
    }
    return known;
  };
  const columnOf = (x: number) => Math.floor(x / tileKm);

  let rows = new Float64Array(BATCH * PLACES_PER_TILE);
  const batchLack = new Float64Array(BATCH);
  const batchExplained = new Float64Array(BATCH);
  const batchValue = new Float64Array(BATCH);
  /** Targets of one tile, at most BATCH of them. */
  const solveBatch = (tile: Tile, targets: Int32Array, from: number, count: number, asked: Asked): void => {
    const { places: chosen, dual, lower, ones } = tile;
    const m = chosen.length;
    if (rows.length < m * count) rows = new Float64Array(m * BATCH);
    batchValue.fill(mean);
    for (let a = 0; a < m; a++) {
      const x = xKm[chosen[a]];
      const y = yKm[chosen[a]];
      const weight = dual[a];
      const at = a * count;
      for (let t = 0; t < count; t++) {
        const target = targets[from + t];
        const c = covariance(model, x - asked.xKm[target], y - asked.yKm[target]);
        rows[at + t] = c;
        batchValue[t] += weight * c;
      }
    }
    solveLowerRowsInPlace(lower, m, rows, count);
    batchLack.fill(1);
    batchExplained.fill(0);
    for (let a = 0; a < m; a++) {
      const one = ones[a];
      for (let t = 0, at = a * count; t < count; t++, at++) {
        const solved = rows[at];
        batchExplained[t] += solved * solved;
        batchLack[t] -= one * solved;
      }
    }
    for (let t = 0; t < count; t++) {
      const target = targets[from + t];
      asked.value[target] = batchValue[t];
      // Rounding may leave a hair below 0 where a value stands at the target.
      asked.variance[target] = Math.max(0, sill - batchExplained[t] + batchLack[t] ** 2 / onesSquared);
    }
  };
  const one = {
    xKm: new Float64Array(1),
    yKm: new Float64Array(1),
    value: new Float64Array(1),
    variance: new Float64Array(1),
  };
  const first = Int32Array.of(0);
  const result = { value: 0, variance: 0 };
  return {
    tileKm,
    value(x, y) {
      const { places: chosen, dual } = tileAt(columnOf(x), columnOf(y));
      let value = mean;
      for (let a = 0; a < chosen.length; a++) {
        value += dual[a] * covariance(model, xKm[chosen[a]] - x, yKm[chosen[a]] - y);
      }
      return value;
    },
    estimate(x, y) {
      one.xKm[0] = x;
      one.yKm[0] = y;
      solveBatch(tileAt(columnOf(x), columnOf(y)), first, 0, 1, one);
      result.value = one.value[0];
      result.variance = one.variance[0];
      return result;
    },
    estimateAll(x, y, value, variance) {
      const asked = { xKm: x, yKm: y, value, variance };
      const byTile = new Map<string, number[]>();
      for (let target = 0; target < x.length; target++) {
        const key = `${columnOf(x[target])} ${columnOf(y[target])}`;
        const members = byTile.get(key);
        if (members === undefined) byTile.set(key, [target]);
        else members.push(target);
      }
      for (const [key, members] of byTile) {
        const [column, row] = key.split(" ").map(Number);
        const tile = makeTile(column, row);
        const targets = Int32Array.from(members);
        for (let from = 0; from < targets.length; from += BATCH) {
          solveBatch(tile, targets, from, Math.min(BATCH, targets.length - from), asked);
        }
      }
    },
  };
}

interface Asked {
  readonly xKm: Float64Array;
  readonly yKm: Float64Array;
  readonly value: Float64Array | Float32Array;
  readonly variance: Float64Array | Float32Array;
}

/** Half the mean distance of places; of places on a line, half of what lies between two of them. */
function tileSideKm(xKm: Float64Array, yKm: Float64Array): number {
  const span = (of: Float64Array) =>
    of.reduce((most, v) => Math.max(most, v), Number.NEGATIVE_INFINITY) -
    of.reduce((least, v) => Math.min(least, v), Number.POSITIVE_INFINITY);
  const width = span(xKm);
  const height = span(yKm);
  const n = xKm.length;
  const apartKm = Math.max(Math.sqrt((width * height) / n), Math.max(width, height) / n);
  return apartKm > 0 ? TILE_SIDE * apartKm : 1;
}
