import { choleskyInPlace, solveLowerInPlace, solveUpperInPlace } from "./cholesky.ts";
import { covariance, type KrigingEstimate, type KrigingInput } from "./kriging.ts";

/** Ordinary kriging at a target from the places nearest to it. */
export interface LocalKriging {
  /** Value and variance; the object is used again by the next call. */
  estimate(xKm: number, yKm: number): KrigingEstimate;
}

/** Places per bin of the search, on average. */
const PLACES_PER_BIN = 3;

/**
 * Ordinary kriging from the nearest places only, for networks too large for one system.
 *
 * Covariances between places are worked out once. Neighbouring targets mostly share their neighbours: as
 * long as the set stays the same its factor is kept, so targets should come row by row. Ties of distance go
 * to the place that stands first.
 *
 * @param neighbours - how many; 16 or more keep the steps where a neighbour changes below notice
 * @returns "singular" where places coincide and carry no error
 */
export function localKriging(
  { places, values, model, errorVariance }: Omit<KrigingInput, "drift">,
  neighbours: number,
): LocalKriging | "singular" {
  const n = values.length;
  const k = Math.min(neighbours, n);
  const xKm = Float64Array.from(places.xKm);
  const yKm = Float64Array.from(places.yKm);
  const sill = model.nugget + model.partialSill;
  const between = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) between[i * n + j] = covariance(model, xKm[i] - xKm[j], yKm[i] - yKm[j]);
    between[i * n + i] = sill + (errorVariance?.[i] ?? 0);
  }
  if (!choleskyInPlace(between.slice(), n)) return "singular";
  const search = nearestSearch(xKm, yKm, k);
  const chosen = new Int32Array(k).fill(-1);
  const lower = new Float64Array(k * k);
  const ones = new Float64Array(k);
  const dual = new Float64Array(k);
  const toTarget = new Float64Array(k);
  let onesSquared = 0;
  let mean = 0;
  const factor = () => {
    for (let a = 0; a < k; a++) {
      for (let b = 0; b <= a; b++) lower[a * k + b] = between[chosen[a] * n + chosen[b]];
      ones[a] = 1;
      dual[a] = values[chosen[a]];
    }
    // A part of a positive definite matrix is positive definite.
    choleskyInPlace(lower, k);
    solveLowerInPlace(lower, k, ones);
    solveLowerInPlace(lower, k, dual);
    onesSquared = 0;
    mean = 0;
    for (let a = 0; a < k; a++) {
      onesSquared += ones[a] * ones[a];
      mean += ones[a] * dual[a];
    }
    mean /= onesSquared;
    for (let a = 0; a < k; a++) dual[a] -= ones[a] * mean;
    solveUpperInPlace(lower, k, dual);
  };
  const result = { value: 0, variance: 0 };
  return {
    estimate(x, y) {
      const near = search(x, y);
      let same = true;
      for (let a = 0; a < k; a++) {
        if (chosen[a] !== near[a]) {
          same = false;
          chosen[a] = near[a];
        }
      }
      if (!same) factor();
      let value = mean;
      for (let a = 0; a < k; a++) {
        toTarget[a] = covariance(model, xKm[chosen[a]] - x, yKm[chosen[a]] - y);
        value += dual[a] * toTarget[a];
      }
      solveLowerInPlace(lower, k, toTarget);
      let explained = 0;
      let lack = 1;
      for (let a = 0; a < k; a++) {
        explained += toTarget[a] * toTarget[a];
        lack -= ones[a] * toTarget[a];
      }
      result.value = value;
      result.variance = Math.max(0, sill - explained + (lack * lack) / onesSquared);
      return result;
    },
  };
}

/** A search for the k nearest places, by bins; the answer is sorted by index, and used again by the next call. */
function nearestSearch(
  xKm: Float64Array,
  yKm: Float64Array,
  k: number,
): (x: number, y: number) => Int32Array {
  const n = xKm.length;
  const west = xKm.reduce((least, x) => Math.min(least, x), Number.POSITIVE_INFINITY);
  const south = yKm.reduce((least, y) => Math.min(least, y), Number.POSITIVE_INFINITY);
  const width = xKm.reduce((most, x) => Math.max(most, x), Number.NEGATIVE_INFINITY) - west;
  const height = yKm.reduce((most, y) => Math.max(most, y), Number.NEGATIVE_INFINITY) - south;
  const binKm = Math.max(
    Math.sqrt((width * height * PLACES_PER_BIN) / n),
    Math.max(width, height) / n,
    Number.MIN_VALUE,
  );
  const columns = Math.max(1, Math.ceil(width / binKm));
  const rows = Math.max(1, Math.ceil(height / binKm));
  const column = (x: number) => Math.min(columns - 1, Math.max(0, Math.floor((x - west) / binKm)));
  const row = (y: number) => Math.min(rows - 1, Math.max(0, Math.floor((y - south) / binKm)));
  const bins: number[][] = Array.from({ length: columns * rows }, () => []);
  for (let i = 0; i < n; i++) bins[row(yKm[i]) * columns + column(xKm[i])].push(i);
  const squared = new Float64Array(k);
  const found = new Int32Array(k);
  const sorted = new Int32Array(k);
  return (x, y) => {
    const c = column(x);
    const r = row(y);
    let count = 0;
    for (let ring = 0; ring <= Math.max(columns, rows); ring++) {
      // All that the next ring can hold lies further than the edge of the bins seen so far.
      if (count === k) {
        const clear = Math.min(
          x - (west + (c - ring + 1) * binKm),
          west + (c + ring) * binKm - x,
          y - (south + (r - ring + 1) * binKm),
          south + (r + ring) * binKm - y,
        );
        if (clear > 0 && clear * clear > squared[k - 1]) break;
      }
      for (let dr = -ring; dr <= ring; dr++) {
        if (r + dr < 0 || r + dr >= rows) continue;
        const step = Math.abs(dr) === ring ? 1 : Math.max(1, 2 * ring);
        for (let dc = -ring; dc <= ring; dc += step) {
          if (c + dc < 0 || c + dc >= columns) continue;
          for (const i of bins[(r + dr) * columns + c + dc]) {
            const dx = xKm[i] - x;
            const dy = yKm[i] - y;
            const distance = dx * dx + dy * dy;
            if (count === k && distance >= squared[k - 1]) continue;
            let at = count < k ? count++ : k - 1;
            while (at > 0 && squared[at - 1] > distance) {
              squared[at] = squared[at - 1];
              found[at] = found[at - 1];
              at--;
            }
            squared[at] = distance;
            found[at] = i;
          }
        }
      }
    }
    sorted.set(found);
    return sorted.sort();
  };
}
