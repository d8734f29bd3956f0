/** What all gauges and the radar came to in one interval. */
export interface BiasObservation {
  /** How many pairs; 0 where there is nothing to learn. */
  readonly pairCount: number;
  readonly gaugeSumMm: number;
  readonly radarSumMm: number;
}

/** The model of a log bias in time. */
export interface KalmanSettings {
  /** Correlation of the log bias from one interval to the next, above 0 and at most 1. */
  readonly memory: number;
  /** Variance of the log bias about its mean. */
  readonly variance: number;
  /** Variance of the log ratio of a single pair; that of n pairs is a share 1/n. */
  readonly pairVariance: number;
  /** What the log bias returns to without data. */
  readonly meanLogBias: number;
}

/** The log bias after one interval. */
export interface KalmanStep {
  readonly prior: number;
  readonly priorVariance: number;
  /** ln(gauge sum/radar sum); NaN where there was nothing to learn. */
  readonly observation: number;
  readonly gain: number;
  readonly logBias: number;
  readonly variance: number;
}

/**
 * Kalman filter of ln B, B = gauge/radar, as a first-order autoregressive process, after Smith & Krajewski
 * (1991), Journal of Applied Meteorology 30, 397-412:
 * ln B_k - μ = ρ (ln B_{k-1} - μ) + w, Var w = (1 - ρ²) s².
 *
 * It starts from the mean with the full variance and predicts first. An interval without pairs, or where
 * gauges or radar saw no rain, teaches nothing: the bias falls back towards its mean and its variance grows.
 *
 * @param intervals - in time order without holes: the clock runs by intervals, not by what there is
 */
export function kalmanBias(intervals: readonly BiasObservation[], settings: KalmanSettings): KalmanStep[] {
  const { memory, variance, pairVariance, meanLogBias } = settings;
  let logBias = meanLogBias;
  let spread = variance;
  return intervals.map(({ pairCount, gaugeSumMm, radarSumMm }) => {
    const prior = meanLogBias + memory * (logBias - meanLogBias);
    const priorVariance = memory * memory * spread + (1 - memory * memory) * variance;
    const teaches = pairCount > 0 && gaugeSumMm > 0 && radarSumMm > 0;
    const observation = teaches ? Math.log(gaugeSumMm / radarSumMm) : Number.NaN;
    const gain = teaches ? priorVariance / (priorVariance + pairVariance / pairCount) : 0;
    logBias = teaches ? prior + gain * (observation - prior) : prior;
    spread = (1 - gain) * priorVariance;
    return { prior, priorVariance, observation, gain, logBias, variance: spread };
  });
}
