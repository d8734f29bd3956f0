import type { Grid } from "@rainreckon/core";
import { type ErrorInTime, varianceAt, varianceOfMean } from "./error-in-time.ts";
import { type ErrorModel, OFFSET_MM } from "./error-model.ts";
import { COMMON_SHARE } from "./log-covariance.ts";
import { normalNumber, randomField } from "./random-field.ts";

/** What a member is drawn from. */
export interface MemberInput {
  readonly grid: Grid;
  readonly model: ErrorModel;
  readonly time: ErrorInTime;
  /** Depth of the window that the model speaks of, mm. Shape [ny, nx]; NaN is not observed. */
  readonly totalMm: Float32Array;
  /** As `logSpread` gives it, by cell. */
  readonly logSpread: Float32Array;
  /** Numbers in [0, 1), a stream of this member's own. */
  readonly uniform: () => number;
}

/** One of many fields of depth that may all be the true one, drawn interval by interval. */
export interface ErrorMember {
  /**
   * Depth of the next interval: a new array. Dry stays dry and NaN stays NaN; never negative.
   *
   * @param depthMm - the estimate of the interval, shape [ny, nx]
   * @param hours - its length
   */
  next(depthMm: Float32Array, hours: number): Float32Array;
}

/**
 * Draws a member: the estimate times the exponential of a random field with the model's spread, cell by cell, and its
 * correlation in space and time, as in Germann, Berenguer, Sempere-Torres & Zappa (2009, Quarterly Journal of the Royal
 * Meteorological Society 135, 445-456), with waves in place of a matrix.
 *
 * What is wrong with all gauges, and what all places have in common, is one number each, for the whole window. The
 * rest is a field that lasts and one that passes, the latter from interval to interval as an autoregression of the
 * first order with the correlation of neighbouring means. Errors of intervals are wider than those of the window, so
 * that their sum has the window's; the mean is kept.
 */
export function drawMember(input: MemberInput): ErrorMember {
  const { grid, model, time, totalMm, logSpread, uniform } = input;
  const { rangeKm, gaugesSpread, medianLogError } = model;
  const cells = totalMm.length;
  const gauges = gaugesSpread * normalNumber(uniform);
  const common = Math.sqrt(COMMON_SHARE) * normalNumber(uniform);
  const lasting = new Float64Array(cells);
  randomField(grid, rangeKm, uniform, lasting);
  const passing = new Float64Array(cells);
  randomField(grid, rangeKm, uniform, passing);
  const fresh = new Float64Array(cells);
  const ofWindow = varianceAt(time, time.windowHours);
  let before: number | undefined;
  return {
    next(depthMm, hours) {
      if (before !== undefined) {
        const memory = correlationOfNeighbours((before + hours) / 2 / time.hours);
        randomField(grid, rangeKm, uniform, fresh);
        const renewal = Math.sqrt(1 - memory * memory);
        for (let cell = 0; cell < cells; cell++) {
          passing[cell] = memory * passing[cell] + renewal * fresh[cell];
        }
      }
      before = hours;
      const ofInterval = varianceAt(time, hours);
      const lasts = Math.sqrt(time.lastingShare / ofWindow);
      const passes = Math.sqrt(((1 - time.lastingShare) * varianceOfMean(hours / time.hours)) / ofWindow);
      const single = Math.sqrt(1 - COMMON_SHARE);
      return depthMm.map((depth, cell) => {
        const total = totalMm[cell];
        if (!(depth > 0) || !(total > 0)) return depth;
        const ownVariance = Math.max(0, logSpread[cell] ** 2 - gaugesSpread ** 2);
        const own = Math.sqrt(ownVariance);
        const error =
          gauges +
          own * (common + single * (lasts * lasting[cell] + passes * passing[cell])) -
          (ownVariance * single * single * (ofInterval / ofWindow - 1)) / 2;
        const factor = ((total + OFFSET_MM) * Math.exp(medianLogError + error) - OFFSET_MM) / total;
        return depth * Math.max(0, factor);
      });
    },
  };
}

/**
 * Correlation of the means of two spans, one after the other, of a process whose correlation falls exponentially.
 *
 * @param u - length of a span in units of the time of the correlation
 */
export function correlationOfNeighbours(u: number): number {
  return (Math.expm1(-u) / u) ** 2 / varianceOfMean(u);
}
