/** A rain gauge, keyed by network and id; the id is a string and is never read as a number. */
export interface GaugeStation {
  readonly network: string;
  readonly id: string;
  readonly name?: string;
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly elevationM?: number;
  /** What the network says of the gauge, where it does: depth of one tip, heating, corrections applied already. */
  readonly tipMm?: number;
  readonly heated?: boolean;
  readonly corrections?: string;
}

/** What a network says of a reading, or what a check made of it. */
export type ReadingQuality = 0 | 1 | 2;
export const QUALITY_USE = 0;
export const QUALITY_DOUBT = 1;
export const QUALITY_DROP = 2;

/**
 * The depths one gauge measured, as readings that each cover (start, end].
 *
 * Readings are in time order and do not overlap; time that no reading covers was not observed.
 * A missing reading is absent or NaN, never 0. Tips are readings of one tip each on a series
 * whose observed time is covered by zero readings around them.
 */
export interface GaugeSeries {
  readonly network: string;
  readonly id: string;
  /** Usual length of a reading; undefined for tips and for report-on-change data. */
  readonly stepMs?: number;
  /** Smallest depth the gauge can tell (one tip, or one unit of the last digit), where known. */
  readonly resolutionMm?: number;
  /** Shape [n] each. */
  readonly startEpochMs: Float64Array;
  readonly endEpochMs: Float64Array;
  readonly depthMm: Float64Array;
  readonly quality: Uint8Array;
}

/** The key under which gauges are held in maps: network and id, joined by a character that neither holds. */
export function gaugeKey(gauge: { readonly network: string; readonly id: string }): string {
  return `${gauge.network}\u001f${gauge.id}`;
}

/** What one gauge saw of one interval. */
export interface GaugeDepth {
  /** Depth over the part that was observed; NaN when nothing was. */
  readonly depthMm: number;
  /** Share of the interval that usable readings cover, 0 to 1. */
  readonly observedFraction: number;
}
