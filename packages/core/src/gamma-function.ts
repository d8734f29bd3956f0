/** From here on the series of Stirling is good to a few units of the last place. */
const STIRLING_FROM = 15;
const STIRLING = [1 / 12, -1 / 360, 1 / 1260, -1 / 1680, 1 / 1188, -691 / 360360, 1 / 156];

/**
 * Natural logarithm of the gamma function.
 *
 * Source: Abramowitz and Stegun (1964), Handbook of Mathematical Functions, 6.1.41, after the recurrence
 * 6.1.15 has raised the argument.
 *
 * @param x - above 0
 */
export function logGamma(x: number): number {
  let product = 1;
  let high = x;
  while (high < STIRLING_FROM) product *= high++;
  let series = 0;
  for (let k = STIRLING.length - 1; k >= 0; k--) series = series / (high * high) + (STIRLING[k] as number);
  return (
    (high - 0.5) * Math.log(high) - high + 0.5 * Math.log(2 * Math.PI) + series / high - Math.log(product)
  );
}

/** The gamma function of x above 0, to about 13 digits. */
export function gamma(x: number): number {
  return Math.exp(logGamma(x));
}

/**
 * Regularised lower incomplete gamma function P(a, x): the share of the integral of t^(a-1) e^-t below x.
 *
 * Source: Abramowitz and Stegun (1964), 6.5.29 (series) below a + 1, 6.5.31 (continued fraction) above.
 *
 * @param a - above 0
 * @param x - 0 or more, Infinity included
 */
export function lowerGammaShare(a: number, x: number): number {
  if (x <= 0) return 0;
  if (x === Number.POSITIVE_INFINITY) return 1;
  const front = Math.exp(a * Math.log(x) - x - logGamma(a));
  if (x < a + 1) {
    let term = 1 / a;
    let sum = term;
    for (let n = 1; term > sum * 1e-16; n++) {
      term *= x / (a + n);
      sum += term;
    }
    return front * sum;
  }
  // The fraction from its tail: deeper than this it no longer changes a double for x at or above a + 1.
  let tail = 0;
  for (let n = 200; n > 0; n--) tail = (n * (n - a)) / (x + 2 * n + 1 - a - tail);
  return 1 - front / (x + 1 - a - tail);
}
