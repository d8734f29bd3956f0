import { choleskyInPlace, solveLowerInPlace, solveUpperInPlace } from "./cholesky.ts";
import type { Interpolant } from "./interpolate.ts";
import type { Places } from "./sample-variogram.ts";

/** Log factors gauge/radar at places. Shapes [n]. */
export interface LogFactors {
  readonly places: Places;
  readonly logFactor: ArrayLike<number>;
  /** Logarithm of the radar depth there. */
  readonly logRadar: ArrayLike<number>;
  /** Variance of the error of each log factor. */
  readonly errorVariance: ArrayLike<number>;
}

/** What is tried: ranges in spacings of the network, standard deviations of the smooth part and of the nugget. House rules. */
const RANGES = [0.7, 1.1, 1.8, 3, 5];
const DEVIATIONS = [0.05, 0.12, 0.25, 0.45];
const NUGGETS = [0.03, 0.08, 0.18];
/**
 * Standard deviation of the slope of the log factor on the log radar depth: between published exponents b of
 * Z = A R^b, 1.2 to 1.7, a wrong one bends the depth by a power of 0.8 to 1.2. House rule.
 */
const SLOPE_DEVIATION = 0.15;
/** More places than this are thinned evenly before models are weighed, and then the likeliest one speaks alone. */
const WEIGHED_UP_TO = 150;
/** Models that are less likely than this share of all are left out. */
const LEAST_SHARE = 0.005;

interface Model {
  readonly range: number;
  readonly deviation: number;
  readonly nugget: number;
}

interface Solved {
  readonly logLikelihood: number;
  readonly mean: number;
  /** Shape [n]: what covariances to a target are multiplied by. */
  readonly dual: Float64Array;
}

/**
 * Kriging of log factors gauge/radar with the variogram's own uncertainty in it: some thirty gauges do not tell a
 * variogram, so sixty are tried, and what each says counts as much as its restricted likelihood (Kitanidis 1986,
 * Water Resources Research 22, 499-507; Handcock & Stein 1993, Technometrics 35, 403-410). Gaussian shape and nugget;
 * a mean that nothing is known of; and a slope on the log radar depth that is 0 unless the gauges say otherwise.
 *
 * Logs of depth are held between those at the gauges, so that no slope is followed beyond them.
 *
 * @param spacingKm - mean distance of the places, above 0
 * @returns the log factor at a place with a log radar depth
 */
export function bayesianLogFactor(
  factors: LogFactors,
  spacingKm: number,
): (xKm: number, yKm: number, logRadar: number) => number {
  const n = factors.logFactor.length;
  const models = RANGES.flatMap((range) =>
    DEVIATIONS.flatMap((deviation) => NUGGETS.map((nugget): Model => ({ range, deviation, nugget }))),
  );
  const isLarge = n > WEIGHED_UP_TO;
  const sample = isLarge ? thinned(factors, WEIGHED_UP_TO) : factors;
  const alike = RANGES.map((range) => correlations(sample.places, range * spacingKm));
  const weighed = models.flatMap((model) => {
    const solved = solve(sample, model, alike[RANGES.indexOf(model.range)]);
    return solved === undefined ? [] : [{ model, solved }];
  });
  const most = Math.max(...weighed.map(({ solved }) => solved.logLikelihood));
  const likely = weighed
    .map((one) => ({ ...one, weight: Math.exp(one.solved.logLikelihood - most) }))
    .sort((a, b) => b.weight - a.weight);
  const sum = likely.reduce((total, { weight }) => total + weight, 0);
  const kept = isLarge
    ? likely.slice(0, 1).flatMap(({ model }) => {
        const solved = solve(factors, model, correlations(factors.places, model.range * spacingKm));
        return solved === undefined ? [] : [{ model, solved, weight: 1 }];
      })
    : likely.filter(({ weight }) => weight > LEAST_SHARE * sum);
  const keptSum = kept.reduce((total, { weight }) => total + weight, 0);
  // All that models add is linear in their duals: those of one range are one.
  const logRadar = Array.from(factors.logRadar);
  const middle = meanOf(logRadar);
  const low = Math.min(...logRadar);
  const high = Math.max(...logRadar);
  let mean = 0;
  let slope = 0;
  const duals = RANGES.map(() => new Float64Array(n));
  for (const { model, solved, weight } of kept) {
    const share = weight / keptSum;
    const dual = duals[RANGES.indexOf(model.range)];
    mean += share * solved.mean;
    for (let i = 0; i < n; i++) {
      dual[i] += share * solved.dual[i] * model.deviation ** 2;
      slope += share * solved.dual[i] * SLOPE_DEVIATION ** 2 * (logRadar[i] - middle);
    }
  }
  const smooth = RANGES.map(
    (range, k): Interpolant => gaussianSum(factors.places, duals[k], range * spacingKm),
  ).filter((_, k) => duals[k].some((dual) => dual !== 0));
  return (x, y, own) => {
    let log = mean + slope * (Math.min(high, Math.max(low, own)) - middle);
    for (const part of smooth) log += part(x, y);
    return log;
  };
}

function gaussianSum({ xKm, yKm }: Places, dual: Float64Array, rangeKm: number): Interpolant {
  const scale = -1 / (rangeKm * rangeKm);
  return (x, y) => {
    let sum = 0;
    for (let i = 0; i < dual.length; i++) {
      const dx = xKm[i] - x;
      const dy = yKm[i] - y;
      sum += dual[i] * Math.exp(scale * (dx * dx + dy * dy));
    }
    return sum;
  };
}

/** Of places under one range, lower triangle; shape [n, n]. The models of a range share it. */
function correlations({ xKm, yKm }: Places, rangeKm: number): Float64Array {
  const n = xKm.length;
  const matrix = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const squared = (xKm[i] - xKm[j]) ** 2 + (yKm[i] - yKm[j]) ** 2;
      matrix[i * n + j] = Math.exp(-squared / (rangeKm * rangeKm));
    }
  }
  return matrix;
}

/** One model: its restricted likelihood, its mean and its duals; undefined where its system is singular. */
function solve(factors: LogFactors, model: Model, alike: Float64Array): Solved | undefined {
  const { logFactor, logRadar, errorVariance } = factors;
  const n = logFactor.length;
  const middle = meanOf(Array.from(logRadar));
  const lower = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      lower[i * n + j] =
        model.deviation ** 2 * alike[i * n + j] +
        SLOPE_DEVIATION ** 2 * (logRadar[i] - middle) * (logRadar[j] - middle);
    }
    lower[i * n + i] += errorVariance[i] + model.nugget ** 2;
  }
  if (!choleskyInPlace(lower, n)) return undefined;
  const ones = new Float64Array(n).fill(1);
  const dual = Float64Array.from(logFactor);
  solveLowerInPlace(lower, n, ones);
  solveLowerInPlace(lower, n, dual);
  let [onesSquared, mean, logDeterminant] = [0, 0, 0];
  for (let i = 0; i < n; i++) {
    onesSquared += ones[i] * ones[i];
    mean += ones[i] * dual[i];
    logDeterminant += Math.log(lower[i * n + i]);
  }
  mean /= onesSquared;
  let squares = 0;
  for (let i = 0; i < n; i++) {
    dual[i] -= ones[i] * mean;
    squares += dual[i] * dual[i];
  }
  solveUpperInPlace(lower, n, dual);
  return { logLikelihood: -logDeterminant - Math.log(onesSquared) / 2 - squares / 2, mean, dual };
}

/** So many of the places at even steps of their order. */
function thinned({ places, logFactor, logRadar, errorVariance }: LogFactors, count: number): LogFactors {
  const n = logFactor.length;
  const pick = (of: ArrayLike<number>) =>
    Float64Array.from({ length: count }, (_, k) => of[Math.floor((k * n) / count)]);
  return {
    places: { xKm: pick(places.xKm), yKm: pick(places.yKm) },
    logFactor: pick(logFactor),
    logRadar: pick(logRadar),
    errorVariance: pick(errorVariance),
  };
}

function meanOf(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}
