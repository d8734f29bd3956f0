import type { WindowGauge } from "./window-gauges.ts";

/** A gauge that holds more than this share of all gauges' rain decides every sum. House rule. */
const DOMINATES_FROM = 0.5;

/** How many gauges there were at each stage, from files to trust. */
export interface GaugeCounts {
  /** With readings, a station and a cell of the grid. */
  readonly placed: number;
  /** Of these, with a pair that can be used. */
  readonly paired: number;
  readonly trusted: number;
}

/** Why there is no gauge to adjust by; undefined where there is one. */
export function whyNoGauge({ placed, paired, trusted }: GaugeCounts): string | undefined {
  if (placed === 0) return "no gauge with readings stands on the grid";
  if (paired === 0) return `none of ${placed} gauges has readings while the radar looked`;
  if (trusted === 0) return `none of ${paired} gauges is trusted`;
  return undefined;
}

/**
 * What has to be said where one gauge holds most of the rain: an enormous reading that no check could refute, or the
 * only place where it rained.
 */
export function dominanceNote(gauges: readonly WindowGauge[]): string | undefined {
  const sumMm = gauges.reduce((sum, { gaugeMm }) => sum + gaugeMm, 0);
  const most = gauges.reduce<WindowGauge | undefined>(
    (deepest, gauge) => (deepest === undefined || gauge.gaugeMm > deepest.gaugeMm ? gauge : deepest),
    undefined,
  );
  if (most === undefined || gauges.length < 2 || !(most.gaugeMm > DOMINATES_FROM * sumMm)) return undefined;
  const share = Math.round((100 * most.gaugeMm) / sumMm);
  return `gauge ${most.gaugeId} of ${most.network} alone holds ${share} % of the rain of ${gauges.length} gauges`;
}
