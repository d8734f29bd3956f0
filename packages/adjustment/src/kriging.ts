import { choleskyInPlace, solveLowerInPlace, solveUpperInPlace } from "./cholesky.ts";
import type { Places } from "./sample-variogram.ts";
import { correlation, modelDistanceKm, type VariogramModel } from "./variogram-model.ts";

/** What kriging is made from. */
export interface KrigingInput {
  readonly places: Places;
  /** Shape [n]. */
  readonly values: ArrayLike<number>;
  readonly model: VariogramModel;
  /**
   * Variance of the error of each value, shape [n]: on the diagonal only, so that the error-free field is
   * predicted. The model's nugget, by contrast, belongs to the field: exact at the places, and kept in the
   * variance elsewhere.
   */
  readonly errorVariance?: ArrayLike<number>;
  /** Columns of a drift at the places, shape [p][n], beside the constant. */
  readonly drift?: readonly ArrayLike<number>[];
}

export interface KrigingEstimate {
  readonly value: number;
  readonly variance: number;
}

/** Kriging from all places at once: the system is factored once and answers for any number of targets. */
export interface KrigingSystem {
  /** Coefficients of the constant and of each column of the drift. */
  readonly coefficients: readonly number[];
  /** @param drift - the drift at the target, without the constant; as many as there are columns */
  estimate(xKm: number, yKm: number, drift?: readonly number[]): KrigingEstimate;
  /** The value alone: n steps instead of n². */
  value(xKm: number, yKm: number, drift?: readonly number[]): number;
}

/** Why there is no kriging: what a caller falls back on is its own affair, but never a singular system. */
export type KrigingRefusal = "singular" | "drift not identifiable";

/** A column of the drift must keep this share of its spread once the others are taken out. House rule. */
const LEAST_OWN_SPREAD = 1e-8;

/**
 * Ordinary kriging, or kriging with an external drift, of values at places (Journel & Huijbregts 1978;
 * with a drift: generalised least squares, Cressie 1993).
 *
 * Coincident places must have been merged beforehand (`mergeCoincident`). The rank of the drift is tested
 * before anything is solved: where a drift does not vary, or only as another does, there is a refusal
 * instead of a plausible figure with an absurd variance.
 */
export function krigingSystem(input: KrigingInput): KrigingSystem | KrigingRefusal {
  const { places, values, model, errorVariance, drift = [] } = input;
  const n = values.length;
  if (drift.length >= n || !isIdentifiable(drift, n)) return "drift not identifiable";
  const { xKm, yKm } = places;
  const sill = model.nugget + model.partialSill;
  const lower = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) lower[i * n + j] = covariance(model, xKm[i] - xKm[j], yKm[i] - yKm[j]);
    lower[i * n + i] = sill + (errorVariance?.[i] ?? 0);
  }
  if (!choleskyInPlace(lower, n)) return "singular";
  const columns = [new Float64Array(n).fill(1), ...drift.map((column) => Float64Array.from(column))];
  const p = columns.length;
  for (const column of columns) solveLowerInPlace(lower, n, column);
  const whitened = Float64Array.from(values);
  solveLowerInPlace(lower, n, whitened);
  const normal = new Float64Array(p * p);
  const coefficients = new Float64Array(p);
  for (let a = 0; a < p; a++) {
    for (let b = 0; b <= a; b++) normal[a * p + b] = dot(columns[a], columns[b], n);
    coefficients[a] = dot(columns[a], whitened, n);
  }
  if (!choleskyInPlace(normal, p)) return "drift not identifiable";
  solveLowerInPlace(normal, p, coefficients);
  solveUpperInPlace(normal, p, coefficients);
  const dual = whitened;
  for (let i = 0; i < n; i++) for (let a = 0; a < p; a++) dual[i] -= columns[a][i] * coefficients[a];
  solveUpperInPlace(lower, n, dual);
  const toTarget = new Float64Array(n);
  const lack = new Float64Array(p);
  const trend = (own: readonly number[]) =>
    own.reduce((sum, value, a) => sum + value * coefficients[a + 1], coefficients[0]);
  return {
    coefficients: [...coefficients],
    value(x, y, own = []) {
      let sum = trend(own);
      for (let i = 0; i < n; i++) sum += dual[i] * covariance(model, xKm[i] - x, yKm[i] - y);
      return sum;
    },
    estimate(x, y, own = []) {
      let value = trend(own);
      for (let i = 0; i < n; i++) {
        toTarget[i] = covariance(model, xKm[i] - x, yKm[i] - y);
        value += dual[i] * toTarget[i];
      }
      solveLowerInPlace(lower, n, toTarget);
      for (let a = 0; a < p; a++) lack[a] = (a === 0 ? 1 : own[a - 1]) - dot(columns[a], toTarget, n);
      solveLowerInPlace(normal, p, lack);
      // Rounding may leave a hair below 0 where a value stands at the target.
      return { value, variance: Math.max(0, sill - dot(toTarget, toTarget, n) + dot(lack, lack, p)) };
    },
  };
}

/** Covariance of a model between points dx east and dy north of each other; with the nugget at distance 0. */
export function covariance(model: VariogramModel, dxKm: number, dyKm: number): number {
  const distance = modelDistanceKm(model, dxKm, dyKm);
  const structured = model.partialSill * correlation(model.shape, distance / model.rangeKm);
  return distance === 0 ? structured + model.nugget : structured;
}

/** Whether the columns vary, each on its own, once their means are taken out and their spreads made alike. */
function isIdentifiable(drift: readonly ArrayLike<number>[], n: number): boolean {
  const p = drift.length;
  const scaled: Float64Array[] = [];
  for (const column of drift) {
    const mean = Array.from(column).reduce((sum, value) => sum + value, 0) / n;
    const centred = Float64Array.from(column, (value) => value - mean);
    const spread = Math.sqrt(dot(centred, centred, n));
    const size = Math.sqrt(Array.from(column).reduce((sum, value) => sum + value * value, 0));
    if (!(spread > LEAST_OWN_SPREAD * size)) return false;
    scaled.push(centred.map((value) => value / spread));
  }
  const gram = new Float64Array(p * p);
  for (let a = 0; a < p; a++) for (let b = 0; b <= a; b++) gram[a * p + b] = dot(scaled[a], scaled[b], n);
  return choleskyInPlace(gram, p);
}

function dot(a: ArrayLike<number>, b: ArrayLike<number>, n: number): number {
  let sum = 0;
  for (let i = 0; i < n; i++) sum += a[i] * b[i];
  return sum;
}
