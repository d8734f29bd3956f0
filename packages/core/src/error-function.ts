/** Beyond this the function is 1 in double precision. */
const ONE_FROM = 6;
/** From here on the complement is taken from its continued fraction, whose terms then fall fast enough. */
const FRACTION_FROM = 2.5;
/** Terms that the fraction needs at {@link FRACTION_FROM} for double precision; farther out it needs fewer. */
const FRACTION_TERMS = 70;

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

/**
 * exp(x²) (1 - erf x): the complement of the error function without its smallness, so that far tails keep
 * their digits and may be multiplied by something large.
 *
 * Source: Abramowitz and Stegun (1964), Handbook of Mathematical Functions, 7.1.14, read from its tail.
 *
 * @param x - 0 or more
 * @returns relative error below 1e-12; 1 at 0, falling as 1 / (x √π)
 */
export function scaledErrorComplement(x: number): number {
  if (x < FRACTION_FROM) return Math.exp(x * x) * (1 - errorFunction(x));
  const terms = Math.ceil(FRACTION_TERMS * (FRACTION_FROM / x) ** 2) + 4;
  let fraction = x;
  for (let n = terms; n >= 1; n--) fraction = x + n / 2 / fraction;
  return 1 / (Math.sqrt(Math.PI) * fraction);
}
