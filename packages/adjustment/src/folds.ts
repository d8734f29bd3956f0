import type { WindowGauge } from "./window-gauges.ts";

/** Groups of a k-fold; beyond so many gauges half as many, as each learning then costs much. House rule. */
const GROUPS = 10;
const FEWER_GROUPS_FROM = 300;

/**
 * Which gauges are held out together: each alone up to a count, else ten groups by turns (five from 300 gauges on).
 *
 * @returns fold of each gauge, shape [count]
 */
export function foldsOf(count: number, aloneUpTo: number): Int32Array {
  const groups = count < FEWER_GROUPS_FROM ? GROUPS : GROUPS / 2;
  return Int32Array.from({ length: count }, (_, i) => (count <= aloneUpTo ? i : i % groups));
}

/** A cluster for about so many gauges, within these limits. House rule. */
const GAUGES_PER_CLUSTER = 4;
const CLUSTER_LIMITS = [3, 10] as const;

/** How clusters are made, for people. */
export const CLUSTER_RULE =
  "a cluster for every four gauges, three to ten of them: the first is seeded by the gauge nearest to the middle of all, each further one by the gauge farthest from all seeds, and every gauge joins its nearest seed";

/**
 * Clusters by distance, each to be held out at once, so that what is said of its gauges comes from afar: seeds by
 * farthest-first traversal (Gonzalez 1985, Theoretical Computer Science 38, 293-306), {@link CLUSTER_RULE}. Of equal
 * distances the gauge that stands first counts.
 *
 * @returns cluster of each gauge, shape [count]
 */
export function clustersOf(gauges: readonly Pick<WindowGauge, "xKm" | "yKm">[]): Int32Array {
  const n = gauges.length;
  const [fewest, most] = CLUSTER_LIMITS;
  const count = Math.min(n, most, Math.max(fewest, Math.round(n / GAUGES_PER_CLUSTER)));
  const middle = {
    xKm: gauges.reduce((sum, { xKm }) => sum + xKm, 0) / n,
    yKm: gauges.reduce((sum, { yKm }) => sum + yKm, 0) / n,
  };
  const squaredTo = (to: Pick<WindowGauge, "xKm" | "yKm">, i: number) =>
    (gauges[i].xKm - to.xKm) ** 2 + (gauges[i].yKm - to.yKm) ** 2;
  const clusters = new Int32Array(n);
  const nearest = new Float64Array(n).fill(Number.POSITIVE_INFINITY);
  let seed = 0;
  for (let i = 1; i < n; i++) if (squaredTo(middle, i) < squaredTo(middle, seed)) seed = i;
  for (let cluster = 0; cluster < count; cluster++) {
    let farthest = 0;
    for (let i = 0; i < n; i++) {
      const squared = squaredTo(gauges[seed], i);
      if (squared < nearest[i]) {
        nearest[i] = squared;
        clusters[i] = cluster;
      }
      if (nearest[i] > nearest[farthest]) farthest = i;
    }
    seed = farthest;
  }
  return clusters;
}
