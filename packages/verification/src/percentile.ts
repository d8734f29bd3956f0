/**
 * Percentile of a sorted sample, linear between the order statistics: type 7 of Hyndman and Fan (1996),
 * Sample quantiles in statistical packages, American Statistician 50, 361-365.
 *
 * (The library at hand interpolates by another rule, which small samples can feel.)
 *
 * @param ascending - sorted values without NaN
 * @param share - 0 to 1
 * @returns NaN for an empty sample
 * @throws RangeError if the share is outside 0 to 1
 */
export function percentile(ascending: ArrayLike<number>, share: number): number {
  if (!(share >= 0 && share <= 1)) throw new RangeError(`a percentile needs a share of 0 to 1, got ${share}`);
  if (ascending.length === 0) return Number.NaN;
  const place = share * (ascending.length - 1);
  const below = Math.floor(place);
  const low = ascending[below];
  const high = ascending[Math.min(below + 1, ascending.length - 1)];
  return low === high ? low : low + (place - below) * (high - low);
}
