import type { Interference } from "./presets.ts";
import { RAY_COUNT } from "./radar.ts";
import { mixBits } from "./random.ts";

/**
 * The rays of one sweep that another transmitter falls into: none, or one to three side by side.
 * Two times in three they lie within 4 degrees of the transmitter's own azimuth, else anywhere.
 *
 * @param sweepNumber - sweeps of the storm in the order in which they are made
 */
export function interferenceRays(interference: Interference, seed: number, sweepNumber: number): number[] {
  const draw = (of: number): number => mixBits(mixBits(seed * 7919 + of) + sweepNumber * 104729) / 2 ** 32;
  if (draw(1) >= interference.share) return [];
  const home = Math.floor((mixBits(seed * 31 + 5) / 2 ** 32) * RAY_COUNT);
  const first = draw(2) < 2 / 3 ? home - 4 + Math.floor(9 * draw(3)) : Math.floor(RAY_COUNT * draw(3));
  const count = 1 + Math.floor(3 * draw(4));
  return Array.from({ length: count }, (_, i) => (first + i + RAY_COUNT) % RAY_COUNT);
}
