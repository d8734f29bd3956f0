import { quotient } from "./numbers.ts";

/** Standard errors of a ratio of sums. */
export interface RatioStandardError {
  readonly ratio: number;
  /** By linearising the ratio about the means. */
  readonly linearised: number;
  /** By leaving out one item at a time: less optimistic in small samples. */
  readonly jackknife: number;
}

/**
 * Standard error of sum(numerators) / sum(denominators), items taken as independent.
 *
 * Sources: Cochran (1977), Sampling Techniques, third edition, chapter 6 (linearised); Efron (1979),
 * Annals of Statistics 7, 1-26 (jackknife).
 *
 * @param numerators - shape [n]
 * @param denominators - shape [n]
 * @returns NaN where the denominators sum to 0, or for fewer than two items
 * @throws RangeError if the two differ in length
 */
export function ratioStandardError(
  numerators: readonly number[] | Float64Array,
  denominators: readonly number[] | Float64Array,
): RatioStandardError {
  const n = numerators.length;
  if (denominators.length !== n) throw new RangeError("numerators and denominators differ in number");
  let top = 0;
  let bottom = 0;
  for (let i = 0; i < n; i++) {
    top += numerators[i];
    bottom += denominators[i];
  }
  const ratio = quotient(top, bottom);
  if (n < 2 || Number.isNaN(ratio)) return { ratio, linearised: Number.NaN, jackknife: Number.NaN };
  let squares = 0;
  const leaveOneOut = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    squares += (numerators[i] - ratio * denominators[i]) ** 2;
    leaveOneOut[i] = quotient(top - numerators[i], bottom - denominators[i]);
  }
  const meanLeft = leaveOneOut.reduce((sum, value) => sum + value, 0) / n;
  const leftSquares = leaveOneOut.reduce((sum, value) => sum + (value - meanLeft) ** 2, 0);
  return {
    ratio,
    linearised: Math.sqrt(squares / (n * (n - 1))) / Math.abs(bottom / n),
    jackknife: Math.sqrt(((n - 1) / n) * leftSquares),
  };
}
