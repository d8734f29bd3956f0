import type { Places } from "./sample-variogram.ts";

/** A field of factors by two passes of exponential weights. */
export interface TwoPassFactor {
  /** After the first pass alone, and after both; NaN where every weight has vanished. */
  at(xKm: number, yKm: number): { readonly first: number; readonly factor: number };
  /** First pass at the places, shape [n]. */
  readonly firstAtPlaces: Float64Array;
}

/**
 * Factors gauge/radar spread over the field after Brandes (1975), Journal of Applied Meteorology 14,
 * 1339-1345, with the second pass of Barnes (1973): weights exp(-r²/EP), then exp(-r²/(γ EP)) on what the
 * first pass leaves at the gauges.
 *
 * @param factors - gauge/radar at the places, shape [n]
 * @param lengthKm2 - EP, the square of the length of the weights, km²
 * @param convergence - γ, above 0 and below 1
 */
export function twoPassFactor(
  { xKm, yKm }: Places,
  factors: ArrayLike<number>,
  lengthKm2: number,
  convergence: number,
): TwoPassFactor {
  const n = factors.length;
  const weightedMean = (x: number, y: number, values: ArrayLike<number>, length: number): number => {
    let weights = 0;
    let sum = 0;
    for (let i = 0; i < n; i++) {
      const weight = Math.exp(-((xKm[i] - x) ** 2 + (yKm[i] - y) ** 2) / length);
      weights += weight;
      sum += weight * values[i];
    }
    return weights > 0 ? sum / weights : Number.NaN;
  };
  const firstAtPlaces = new Float64Array(n);
  for (let i = 0; i < n; i++) firstAtPlaces[i] = weightedMean(xKm[i], yKm[i], factors, lengthKm2);
  const left = firstAtPlaces.map((first, i) => factors[i] - first);
  return {
    firstAtPlaces,
    at(x, y) {
      const first = weightedMean(x, y, factors, lengthKm2);
      const second = weightedMean(x, y, left, convergence * lengthKm2);
      // Where the narrower weights have vanished the first pass stands.
      return { first, factor: Number.isNaN(second) ? first : first + second };
    },
  };
}

/**
 * Length of the weights from the spacing of a network: EP = 5.052 (2 Δn/π)², Δn = √A (1 + √M)/(M - 1).
 * Koch, desJardins & Kocin (1983), Journal of Climate and Applied Meteorology 22, 1487-1503; the constants
 * are from memory.
 *
 * @param areaKm2 - area of the network, above 0
 * @param count - how many gauges, at least 2
 */
export function lengthFromSpacing(areaKm2: number, count: number): { spacingKm: number; lengthKm2: number } {
  const spacingKm = (Math.sqrt(areaKm2) * (1 + Math.sqrt(count))) / (count - 1);
  return { spacingKm, lengthKm2: 5.052 * ((2 * spacingKm) / Math.PI) ** 2 };
}
