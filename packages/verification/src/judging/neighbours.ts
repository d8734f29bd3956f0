import { median as medianOf } from "simple-statistics";
import type { GaugeEvidence } from "../evidence.ts";
import { percentile } from "../percentile.ts";

/** Least spread that neighbours are held to have, mm: where all agree nothing is divided by 0. House rule. */
const SPREAD_FLOOR_MM = 1;
/** Least difference that counts where the quartiles of the neighbours coincide, mm. House rule h-quartile-zero-spread. */
const ABSOLUTE_FLOOR_MM = 2;
const STANDS_OUT = 5;

/** How far a depth is from those around it, by the usual measures. */
export interface NeighbourIndices {
  readonly median: number;
  readonly mad: number;
  /** |x - median| / (Q75 - Q25), quartiles type 7; NaN where they coincide. */
  readonly quartileIndex: number;
  /** Whether the index is above five (common practice), or x more than 2 mm off neighbours whose quartiles coincide. */
  readonly standsOut: boolean;
  /** 0.6745 (x - median) / MAD; NaN where all agree. */
  readonly madZ: number;
  /** Mean and standard deviation of the neighbours, weighted by 1/d². */
  readonly buddyMean: number;
  readonly buddySpread: number;
  /** How far x is from that mean, over that deviation or 1 mm, whichever is more. */
  readonly buddyZ: number;
}

/**
 * Spatial consistency of a depth. Common practice; the values stand in the reference book under h-quartile-index,
 * h-mad-z and h-buddy.
 *
 * @param depths - of the neighbours, at least one
 * @param distancesKm - to each of them; less than 0.1 km counts as that
 */
export function neighbourIndices(
  x: number,
  depths: readonly number[],
  distancesKm: readonly number[],
): NeighbourIndices {
  const sorted = Float64Array.from(depths).sort();
  const median = medianOf([...depths]);
  const range = percentile(sorted, 0.75) - percentile(sorted, 0.25);
  const mad = medianOf(depths.map((depth) => Math.abs(depth - median)));
  const off = Math.abs(x - median);
  const weights = distancesKm.map((km) => 1 / Math.max(0.1, km) ** 2);
  const weight = weights.reduce((sum, w) => sum + w, 0);
  const mean = depths.reduce((sum, depth, i) => sum + weights[i] * depth, 0) / weight;
  const variance = depths.reduce((sum, depth, i) => sum + weights[i] * (depth - mean) ** 2, 0) / weight;
  return {
    median,
    mad,
    quartileIndex: range > 0 ? off / range : Number.NaN,
    standsOut: range > 0 ? off > STANDS_OUT * range : off > ABSOLUTE_FLOOR_MM,
    madZ: mad > 0 ? (0.6745 * (x - median)) / mad : Number.NaN,
    buddyMean: mean,
    buddySpread: Math.sqrt(variance),
    buddyZ: (x - mean) / Math.max(SPREAD_FLOOR_MM, Math.sqrt(variance)),
  };
}

/** Distance of two gauges in the plane of the grid. */
export function distanceKm(a: GaugeEvidence, b: GaugeEvidence): number {
  return Math.hypot(a.xKm - b.xKm, a.yKm - b.yKm);
}
