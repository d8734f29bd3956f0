import { weightedLinearRegression, weightedMean } from "simple-statistics";
import { NO_LAW, type PowerLaw, type ZrPairs } from "./zr-pairs.ts";

/** The lines through log Z against log R, and how closely the points keep to them. */
export interface LogFits {
  /** Least squares of log R on log Z, turned round: where rain is to be told from reflectivity. */
  readonly rateOnReflectivity: PowerLaw;
  /** Least squares of log Z on log R. */
  readonly reflectivityOnRate: PowerLaw;
  /** Reduced major axis: the ratio of the spreads. */
  readonly reducedMajorAxis: PowerLaw;
  /** Correlation of log Z and log R. */
  readonly correlation: number;
}

const NO_FITS: LogFits = {
  rateOnReflectivity: NO_LAW,
  reflectivityOnRate: NO_LAW,
  reducedMajorAxis: NO_LAW,
  correlation: Number.NaN,
};

/**
 * Power laws by least squares of logarithms, for given weights of the pairs.
 *
 * With r the correlation of the logarithms, the exponents are b·r (log Z on log R), b (reduced major axis) and b/r
 * (log R on log Z): noise on one side flattens the regression on that side, and the axis lies between. None returns
 * the true relation where both sides are noisy: Ciach and Krajewski (1999), Journal of Applied Meteorology 38,
 * 1519-1525. Reduced major axis: Kermack and Haldane (1950), Biometrika 37, 30-41 (from memory).
 * Means of logarithms are not logarithms of means: none of them keeps the sum of rain.
 *
 * @param pairs - both sides above 0: rates, and reflectivities above -Infinity
 * @param weights - shape [n], 0 or more: how often each pair occurs
 * @returns NaN throughout where fewer than two pairs occur, one side is constant, or the two do not rise together
 */
export function logFits(pairs: ZrPairs, weights: ArrayLike<number>): LogFits {
  const drawn = [...pairs.dbz.keys()].filter((i) => weights[i] > 0);
  if (drawn.length < 2) return NO_FITS;
  const share = drawn.map((i) => weights[i]);
  const logR = drawn.map((i) => Math.log10(pairs.rateMmPerHour[i]));
  const logZ = drawn.map((i) => pairs.dbz[i] / 10);
  if (isConstant(logR) || isConstant(logZ)) return NO_FITS;
  const zOnR = weightedLinearRegression(
    logR.map((x, k) => [x, logZ[k]]),
    share,
  ).m;
  const rOnZ = weightedLinearRegression(
    logZ.map((x, k) => [x, logR[k]]),
    share,
  ).m;
  if (!(zOnR > 0 && rOnZ > 0)) return NO_FITS;
  const meanR = weightedMean(logR, share);
  const meanZ = weightedMean(logZ, share);
  // All lines go through the means.
  const law = (b: number): PowerLaw => ({ a: 10 ** (meanZ - b * meanR), b });
  return {
    rateOnReflectivity: law(1 / rOnZ),
    reflectivityOnRate: law(zOnR),
    reducedMajorAxis: law(Math.sqrt(zOnR / rOnZ)),
    correlation: Math.sqrt(Math.min(1, zOnR * rOnZ)),
  };
}

function isConstant(values: readonly number[]): boolean {
  return values.every((value) => value === values[0]);
}
