import { NO_LAW, type PowerLaw, type ZrPairs } from "./zr-pairs.ts";

/** Exponents that a bias-free fit is looked for between. */
export const EXPONENTS = { low: 1, high: 2.5 } as const;
/** Steps of the first look, and width at which the second one stops. */
const FIRST_LOOK = 0.1;
const CLOSE_ENOUGH = 1e-9;
const GOLDEN = (Math.sqrt(5) - 1) / 2;

/** How a relation meets pairs. */
export interface RelationError {
  /** Sum of the rates by the relation over that of the gauges, radar/gauge. NaN where the gauges are dry. */
  readonly biasRatio: number;
  readonly rootMeanSquareErrorMmPerHour: number;
  /** The same over the mean gauge rate, per cent. */
  readonly relativeErrorPercent: number;
}

/**
 * The A that keeps the sum of rain for a given exponent: A = (Σ Z^(1/b) / Σ R)^b, for given weights of the pairs.
 *
 * A mean-field factor F on the rates is the same as A turned into A F^-b.
 *
 * @param b - above 0
 * @param weights - shape [n], 0 or more
 * @returns NaN where either sum is 0
 */
export function biasFreeLaw(pairs: ZrPairs, b: number, weights: ArrayLike<number>): PowerLaw {
  const { dbz, rateMmPerHour } = pairs;
  let ofRadar = 0;
  let ofGauge = 0;
  for (let i = 0; i < dbz.length; i++) {
    if (!(weights[i] > 0)) continue;
    ofRadar += weights[i] * 10 ** (dbz[i] / (10 * b));
    ofGauge += weights[i] * rateMmPerHour[i];
  }
  const a = (ofRadar / ofGauge) ** b;
  return a > 0 && Number.isFinite(a) ? { a, b } : NO_LAW;
}

/**
 * A and b of the smallest root mean square error of rain rate among the relations that keep the sum of rain.
 *
 * @param weights - shape [n], 0 or more
 * @returns NaN where the error is smallest at an end of {@link EXPONENTS}, or there is no such relation: these pairs
 *   do not hold an exponent
 */
export function biasFreeFit(pairs: ZrPairs, weights: ArrayLike<number>): PowerLaw {
  const errorOf = squareErrorByExponent(pairs, weights);
  let best: number = EXPONENTS.low;
  let least = Number.POSITIVE_INFINITY;
  const steps = Math.round((EXPONENTS.high - EXPONENTS.low) / FIRST_LOOK);
  for (let k = 0; k <= steps; k++) {
    const b = EXPONENTS.low + k * FIRST_LOOK;
    const error = errorOf(b);
    if (error < least) [best, least] = [b, error];
  }
  let low = Math.max(EXPONENTS.low, best - FIRST_LOOK);
  let high = Math.min(EXPONENTS.high, best + FIRST_LOOK);
  let [left, right] = [high - GOLDEN * (high - low), low + GOLDEN * (high - low)];
  let [errorLeft, errorRight] = [errorOf(left), errorOf(right)];
  while (high - low > CLOSE_ENOUGH) {
    if (errorLeft <= errorRight) {
      [high, right, errorRight] = [right, left, errorLeft];
      left = high - GOLDEN * (high - low);
      errorLeft = errorOf(left);
    } else {
      [low, left, errorLeft] = [left, right, errorRight];
      right = low + GOLDEN * (high - low);
      errorRight = errorOf(right);
    }
    // Near its floor the error is flat to the last bit, and the search would walk on rounding.
    if (high - low < 1e-6 && errorLeft === errorRight) break;
  }
  const b = (low + high) / 2;
  const atEnd = b - EXPONENTS.low < 1e-6 || EXPONENTS.high - b < 1e-6;
  return least === Number.POSITIVE_INFINITY || atEnd ? NO_LAW : biasFreeLaw(pairs, b, weights);
}

/** Sum of squared errors along the bias-free relations; Infinity where there is none. Sorts out weightless pairs once. */
function squareErrorByExponent(
  { dbz, rateMmPerHour }: ZrPairs,
  weights: ArrayLike<number>,
): (b: number) => number {
  const drawn = [...dbz.keys()].filter((i) => weights[i] > 0);
  const weight = Float64Array.from(drawn, (i) => weights[i]);
  const logZ = Float64Array.from(drawn, (i) => (dbz[i] * Math.LN10) / 10);
  const rate = Float64Array.from(drawn, (i) => rateMmPerHour[i]);
  return (b) => {
    let radar = 0;
    let gauge = 0;
    let radar2 = 0;
    let gauge2 = 0;
    let cross = 0;
    for (let i = 0; i < rate.length; i++) {
      const root = Math.exp(logZ[i] / b);
      const share = weight[i];
      radar += share * root;
      gauge += share * rate[i];
      radar2 += share * root * root;
      gauge2 += share * rate[i] * rate[i];
      cross += share * root * rate[i];
    }
    if (!(radar > 0 && gauge > 0)) return Number.POSITIVE_INFINITY;
    const factor = gauge / radar;
    return factor * factor * radar2 - 2 * factor * cross + gauge2;
  };
}

/** How a relation meets the pairs that its A and b may have been fitted to: in-sample where they were. */
export function relationError({ dbz, rateMmPerHour }: ZrPairs, { a, b }: PowerLaw): RelationError {
  let radar = 0;
  let gauge = 0;
  let square = 0;
  for (let i = 0; i < dbz.length; i++) {
    const rate = (10 ** (dbz[i] / 10) / a) ** (1 / b);
    radar += rate;
    gauge += rateMmPerHour[i];
    square += (rate - rateMmPerHour[i]) ** 2;
  }
  const rootMeanSquareErrorMmPerHour = Math.sqrt(square / dbz.length);
  return {
    biasRatio: gauge > 0 ? radar / gauge : Number.NaN,
    rootMeanSquareErrorMmPerHour,
    relativeErrorPercent: gauge > 0 ? (100 * rootMeanSquareErrorMmPerHour * dbz.length) / gauge : Number.NaN,
  };
}
