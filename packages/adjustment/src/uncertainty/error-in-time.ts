import { gaugeLogVariance, logError } from "./error-model.ts";

/** How errors of one place go on in time. */
export interface ErrorInTime {
  /** Share of the variance of an instant's error that stays all window long, 0 to 1. */
  readonly lastingShare: number;
  /** Time in which the rest falls to 1/e of its correlation, hours. */
  readonly hours: number;
  readonly windowHours: number;
}

/** A depth of an interval of a held-out gauge, its window beside it. */
export interface IntervalResidual {
  /** ln((truth + offset) / (estimate + offset)) of the interval, less that of the window. */
  readonly logDeviation: number;
  /** Variance of that by the gauge alone. */
  readonly gaugeLogVariance: number;
  /** The spread of the window's own error there. */
  readonly windowSpread: number;
}

/**
 * How an interval's error at a held-out gauge differs from that of its window.
 *
 * @param gaugeVarianceMm2 - of the interval's gauge depth by the gauge alone
 */
export function intervalLogDeviation(
  window: { readonly gaugeMm: number; readonly depthMm: number },
  interval: { readonly gaugeMm: number; readonly depthMm: number },
  gaugeVarianceMm2: number,
  windowSpread: number,
): IntervalResidual {
  return {
    logDeviation: logError(interval) - logError(window),
    gaugeLogVariance: gaugeLogVariance({ ...interval, gaugeVarianceMm2 }),
    windowSpread,
  };
}

/** What stands where nothing tells. House rules. */
const LASTING_SHARE = 0.5;
const HOURS = 1;
/** Memories that are tried, the longest first: hourly sums cannot tell a long one from what lasts. */
const TRIED_HOURS = [HOURS, 0.5, 0.25, 0.1];
const LEAST_LASTING = 0.05;
/** So many residuals count as much as what is expected. House rule. */
const EXPECTED_COUNTS_AS = 20;
/** Median of the square of a standard normal variable. */
const MEDIAN_SQUARE = 0.4549364231195724;

/**
 * How much larger errors of intervals are than those of the window, told by held-out gauges hour by hour: the
 * correlation over time falls to what lasts all window long (a bias of the place) with a stated time, which hourly
 * sums cannot tell apart from it.
 *
 * @param intervalHours - length of the intervals of the residuals
 */
export function learnErrorInTime(
  residuals: readonly IntervalResidual[],
  intervalHours: number,
  windowHours: number,
): ErrorInTime {
  const expected: ErrorInTime = { lastingShare: LASTING_SHARE, hours: HOURS, windowHours };
  const shares = residuals
    .filter(({ windowSpread }) => windowSpread > 0)
    .map(({ logDeviation, gaugeLogVariance, windowSpread }) =>
      Math.max(0, (logDeviation ** 2 - MEDIAN_SQUARE * gaugeLogVariance) / windowSpread ** 2),
    )
    .toSorted((a, b) => a - b);
  if (shares.length < 3 || !(intervalHours < windowHours)) return expected;
  const told = 1 + shares[shares.length >> 1] / MEDIAN_SQUARE;
  const usual = intervalFactor(expected, intervalHours) ** 2;
  const weight = shares.length / (shares.length + EXPECTED_COUNTS_AS);
  const ratio = Math.exp(weight * Math.log(told) + (1 - weight) * Math.log(usual));
  for (const hours of TRIED_HOURS) {
    // ratio = (l + (1 - l) f(interval)) / (l + (1 - l) f(window)), solved for l.
    const above = varianceOfMean(intervalHours / hours) - ratio * varianceOfMean(windowHours / hours);
    const lastingShare = above / (above + ratio - 1);
    // Deviations too large for this memory ask for less than nothing that lasts: a shorter one is tried.
    if (above > 0 && lastingShare >= LEAST_LASTING)
      return { lastingShare: Math.min(1, lastingShare), hours, windowHours };
  }
  return { lastingShare: LEAST_LASTING, hours: TRIED_HOURS[TRIED_HOURS.length - 1], windowHours };
}

/** By what the spread of the window is multiplied to have that of an interval. */
export function intervalFactor(time: ErrorInTime, intervalHours: number): number {
  return Math.sqrt(varianceAt(time, intervalHours) / varianceAt(time, time.windowHours));
}

/** Variance of the mean error of a span, that of an instant being 1. */
export function varianceAt({ lastingShare, hours }: ErrorInTime, spanHours: number): number {
  return lastingShare + (1 - lastingShare) * varianceOfMean(spanHours / hours);
}

/**
 * Variance of the mean over a span of a process whose correlation falls exponentially, 2 (u - 1 + exp(-u)) / u²
 * (Taylor 1922, Proceedings of the London Mathematical Society s2-20, 196-212).
 *
 * @param u - the span in units of the time of the correlation
 */
export function varianceOfMean(u: number): number {
  return u < 1e-4 ? 1 - u / 3 : (2 * (u + Math.expm1(-u))) / (u * u);
}
