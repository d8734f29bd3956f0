import { type ErrorInTime, intervalFactor } from "./error-in-time.ts";
import { type ErrorModel, OFFSET_MM, Z90 } from "./error-model.ts";
import { logCovariance } from "./log-covariance.ts";

/** How a depth may lie, mm. */
export interface DepthRange {
  readonly meanMm: number;
  readonly standardErrorMm: number;
  /** One in ten truths lies below, one in ten above. */
  readonly p10Mm: number;
  readonly p90Mm: number;
  /** Spread of the logarithm of the depth with {@link OFFSET_MM} added. */
  readonly logSpread: number;
}

const NO_RANGE: DepthRange = {
  meanMm: Number.NaN,
  standardErrorMm: Number.NaN,
  p10Mm: Number.NaN,
  p90Mm: Number.NaN,
  logSpread: Number.NaN,
};

/**
 * The depth at a place whose logarithm, after {@link OFFSET_MM} is added, is normal about a median: a log-normal
 * depth (Aitchison & Brown 1957), never below 0. Its mean is above its median.
 *
 * @param depthMm - the estimate; NaN gives NaN
 * @param medianLogError - of truth over estimate
 */
export function pointRange(depthMm: number, medianLogError: number, logSpread: number): DepthRange {
  const median = (depthMm + OFFSET_MM) * Math.exp(medianLogError);
  return logNormalRange(
    median * Math.exp(logSpread ** 2 / 2),
    median ** 2 * Math.exp(logSpread ** 2) * Math.expm1(logSpread ** 2),
  );
}

/**
 * A log-normal depth of a mean and a variance.
 *
 * @param meanMm - with {@link OFFSET_MM} added, above 0
 */
export function logNormalRange(meanMm: number, varianceMm2: number): DepthRange {
  if (Number.isNaN(meanMm) || Number.isNaN(varianceMm2)) return NO_RANGE;
  const logVariance = Math.log1p(varianceMm2 / meanMm ** 2);
  const median = meanMm * Math.exp(-logVariance / 2);
  const reach = Z90 * Math.sqrt(logVariance);
  return {
    logSpread: Math.sqrt(logVariance),
    meanMm: Math.max(0, meanMm - OFFSET_MM),
    standardErrorMm: Math.sqrt(varianceMm2),
    p10Mm: Math.max(0, median * Math.exp(-reach) - OFFSET_MM),
    p90Mm: Math.max(0, median * Math.exp(reach) - OFFSET_MM),
  };
}

/** Cells of an area: where, how deep, how sure, and how much of the area each is. Shapes [cells]. */
export interface AreaCells {
  readonly xKm: ArrayLike<number>;
  readonly yKm: ArrayLike<number>;
  readonly depthMm: ArrayLike<number>;
  readonly logSpread: ArrayLike<number>;
  readonly fraction: ArrayLike<number>;
}

/** Cells that stand for a larger area: errors of cells side by side are all but one. House rule. */
const MOST_CELLS = 160;

/**
 * The mean depth of an area. Errors of its cells are alike the nearer they are to one another, so that they do not
 * cancel as those of strangers do; the sum of log-normals is taken for log-normal with their mean and variance (Fenton 1960, IRE
 * Transactions on Communications Systems 8, 57-67).
 *
 * Large areas are sampled by cells at even steps, which is the mean correlation over sampled pairs.
 *
 * @returns all NaN where no cell has a depth
 */
export function areaRange(cells: AreaCells, model: ErrorModel): DepthRange {
  const { medianLogError } = model;
  const at: number[] = [];
  for (let k = 0; k < cells.depthMm.length; k++) {
    if (cells.depthMm[k] >= 0 && cells.fraction[k] > 0) at.push(k);
  }
  if (at.length === 0) return NO_RANGE;
  const step = Math.ceil(at.length / MOST_CELLS);
  const meanOf = (k: number) =>
    (cells.depthMm[k] + OFFSET_MM) * Math.exp(medianLogError + cells.logSpread[k] ** 2 / 2);
  let whole = 0;
  let mean = 0;
  for (const k of at) {
    whole += cells.fraction[k];
    mean += cells.fraction[k] * meanOf(k);
  }
  const sampled = at.filter((_, i) => i % step === step >> 1 || step === 1);
  let weight = 0;
  let variance = 0;
  const weighted = sampled.map((k) => cells.fraction[k] * meanOf(k));
  for (let a = 0; a < sampled.length; a++) {
    const i = sampled[a];
    weight += cells.fraction[i];
    variance += weighted[a] ** 2 * Math.expm1(cells.logSpread[i] ** 2);
    for (let b = 0; b < a; b++) {
      const j = sampled[b];
      const distance = Math.hypot(cells.xKm[i] - cells.xKm[j], cells.yKm[i] - cells.yKm[j]);
      variance +=
        2 *
        weighted[a] *
        weighted[b] *
        Math.expm1(logCovariance(model, cells.logSpread[i], cells.logSpread[j], distance));
    }
  }
  return logNormalRange(mean / whole, variance / weight ** 2);
}

/**
 * The range of a part of the window: in proportion to its depth, and wider, since errors cancel less in a shorter time.
 *
 * @param window - the range of the window
 * @param windowMm - the depth that it is about; with `depthMm` of the same kind, so that their ratio counts
 * @param hours - length of the part
 * @returns all NaN where the depth or the range is
 */
export function intervalRange(
  window: DepthRange,
  windowMm: number,
  depthMm: number,
  time: ErrorInTime,
  hours: number,
): DepthRange {
  const spread = window.logSpread * intervalFactor(time, hours);
  const shift = (window.meanMm + OFFSET_MM) / (windowMm + OFFSET_MM);
  const mean = (depthMm + OFFSET_MM) * shift;
  return logNormalRange(mean, mean ** 2 * Math.expm1(spread ** 2));
}
