/** Places of values, km in one plane. Shapes [n]. */
export interface Places {
  readonly xKm: ArrayLike<number>;
  readonly yKm: ArrayLike<number>;
}

/** One bin of a sample variogram that holds pairs. */
export interface VariogramBin {
  readonly pairCount: number;
  /** Mean distance of its pairs, km. */
  readonly distanceKm: number;
  /** In the square of the values' unit. */
  readonly semivariance: number;
}

export interface SampleVariogramOptions {
  readonly binKm: number;
  readonly cutoffKm: number;
  /** Matheron's mean of squares, or the robust estimator of Cressie & Hawkins (1980). */
  readonly estimator?: "matheron" | "cressie-hawkins";
}

/**
 * Sample variogram: bins (lo, hi] of equal width, empty ones left out.
 *
 * The robust estimator is that of Cressie & Hawkins (1980), Mathematical Geology 12, 115-125, with the
 * correction 0.457 + 0.494/N.
 *
 * @param values - shape [n]
 */
export function sampleVariogram(
  { xKm, yKm }: Places,
  values: ArrayLike<number>,
  { binKm, cutoffKm, estimator = "matheron" }: SampleVariogramOptions,
): VariogramBin[] {
  const binCount = Math.ceil(cutoffKm / binKm - 1e-9);
  const counts = new Float64Array(binCount);
  const distances = new Float64Array(binCount);
  const sums = new Float64Array(binCount);
  const robust = estimator === "cressie-hawkins";
  for (let i = 0; i < values.length; i++) {
    for (let j = 0; j < i; j++) {
      const dx = xKm[i] - xKm[j];
      const dy = yKm[i] - yKm[j];
      const distance = Math.sqrt(dx * dx + dy * dy);
      if (distance > cutoffKm) continue;
      const bin = Math.max(0, Math.ceil(distance / binKm) - 1);
      const difference = values[i] - values[j];
      counts[bin]++;
      distances[bin] += distance;
      sums[bin] += robust ? Math.sqrt(Math.abs(difference)) : difference * difference;
    }
  }
  const bins: VariogramBin[] = [];
  for (let bin = 0; bin < binCount; bin++) {
    const pairCount = counts[bin];
    if (pairCount === 0) continue;
    const mean = sums[bin] / pairCount;
    bins.push({
      pairCount,
      distanceKm: distances[bin] / pairCount,
      semivariance: robust ? mean ** 4 / (0.457 + 0.494 / pairCount) / 2 : mean / 2,
    });
  }
  return bins;
}
