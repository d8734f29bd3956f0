/** Beyond this the function is 1 in double precision. */
const ONE_FROM = 6;

/**
 * The error function.
 *
 * Source: Abramowitz and Stegun (1964), Handbook of Mathematical Functions, 7.1.6; all terms of that
 * series have one sign, so no digits are lost to cancellation.
 *
 * @returns within a few units of the last place; NaN stays NaN
 */
export function errorFunction(x: number): number {
  if (Math.abs(x) >= ONE_FROM) return Math.sign(x);
  let term = x;
  let sum = x;
  for (let n = 1; Math.abs(term) > Math.abs(sum) * 1e-17; n++) {
    term *= (2 * x * x) / (2 * n + 1);
    sum += term;
  }
  return (2 / Math.sqrt(Math.PI)) * Math.exp(-x * x) * sum;
}
