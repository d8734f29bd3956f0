import { probit } from "simple-statistics";

/**
 * Standard normal distribution function by Taylor series about 0; absolute error below 1e-14 for |z| < 7.
 *
 * Source: Marsaglia (2004), Evaluating the normal distribution, Journal of Statistical Software 11(4).
 */
export function normalProbability(z: number): number {
  if (z < -38) return 0;
  if (z > 38) return 1;
  let term = z;
  let sum = z;
  let previous = Number.NaN;
  for (let k = 3; sum !== previous; k += 2) {
    previous = sum;
    term *= (z * z) / k;
    sum += term;
  }
  return 0.5 + sum * normalDensity(z);
}

/**
 * Standard normal quantile: the z that a share p lies below.
 *
 * Newton's method on {@link normalProbability}, started from the library's approximation.
 *
 * @param p - above 0 and below 1
 * @throws RangeError outside that range
 */
export function normalQuantile(p: number): number {
  if (!(p > 0 && p < 1)) throw new RangeError(`a normal quantile needs a share between 0 and 1, got ${p}`);
  let z = probit(p);
  for (let i = 0; i < 50; i++) {
    const step = (normalProbability(z) - p) / normalDensity(z);
    z -= step;
    if (Math.abs(step) < 1e-14) break;
  }
  return z;
}

function normalDensity(z: number): number {
  return Math.exp((-z * z) / 2) / Math.sqrt(2 * Math.PI);
}
