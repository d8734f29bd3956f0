import { gaugeKey, type Pair } from "@rainreckon/core";
import { decibels } from "./numbers.ts";
import type { GaugeVerdict } from "./verdict.ts";

/** One row of `gauges.csv`, by the names of its columns. NaN is written as an empty cell. */
export interface GaugeRow {
  readonly network: string;
  readonly gauge_id: string;
  /** Depths over the time that both gauge and radar observed. */
  readonly total_mm: number;
  readonly radar_total_mm: number;
  /** 10 log10(radar / gauge); NaN where a side is 0. */
  readonly ratio_db: number;
  readonly verdict: string;
  readonly cause: string;
  readonly evidence: string;
}

/**
 * Rows of `gauges.csv`, one per verdict and in that order.
 *
 * @param wholePairs - one pair per gauge over the whole window
 * @throws RangeError if a verdict's gauge has no pair
 */
export function gaugeRows(wholePairs: readonly Pair[], verdicts: readonly GaugeVerdict[]): GaugeRow[] {
  const pairs = new Map(
    wholePairs.map((pair) => [gaugeKey({ network: pair.network, id: pair.gaugeId }), pair]),
  );
  return verdicts.map((verdict) => {
    const pair = pairs.get(gaugeKey({ network: verdict.network, id: verdict.gaugeId }));
    if (pair === undefined) {
      throw new RangeError(`gauge ${verdict.network} ${verdict.gaugeId} has a verdict but no pair`);
    }
    return {
      network: verdict.network,
      gauge_id: verdict.gaugeId,
      total_mm: pair.gaugeMm,
      radar_total_mm: pair.radarMm,
      ratio_db: pair.gaugeMm > 0 ? decibels(pair.radarMm / pair.gaugeMm) : Number.NaN,
      verdict: verdict.verdict,
      cause: verdict.cause?.words ?? "",
      evidence: verdict.evidence,
    };
  });
}
