import type { Places } from "./sample-variogram.ts";

/**
 * Inverse distance weighting (Shepard 1968, Proceedings of the 23rd ACM National Conference, 517-524):
 * the mean of all values with weights distance^-power; exact at the places.
 *
 * @param values - shape [n], n ≥ 1
 */
export function inverseDistance(
  { xKm, yKm }: Places,
  values: ArrayLike<number>,
  power: number,
  x: number,
  y: number,
): number {
  let weights = 0;
  let sum = 0;
  for (let i = 0; i < values.length; i++) {
    const dx = xKm[i] - x;
    const dy = yKm[i] - y;
    const squared = dx * dx + dy * dy;
    if (squared === 0) return values[i];
    const weight = power === 2 ? 1 / squared : squared ** (-power / 2);
    weights += weight;
    sum += weight * values[i];
  }
  return sum / weights;
}
