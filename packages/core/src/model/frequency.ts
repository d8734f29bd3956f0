/**
 * Depths that are exceeded so often, as an authority publishes them: depth by duration and return period.
 *
 * `series` says what the periods count: AMS, years of which the largest depth exceeds (annual-maximum series); PDS, all
 * exceedances (partial-duration series, peaks over threshold). `kind` says what the depths are of: a point, or the mean
 * over an area.
 */
export interface FrequencyTable {
  readonly series: "AMS" | "PDS" | "unknown";
  readonly kind: "point" | "areal" | "unknown";
  /** Of areal depths, where the table says it. */
  readonly areaKm2?: number;
  /** Whose table it is, and its edition or year; empty where the table does not say. */
  readonly source: string;
  readonly edition: string;
  /** Shape [durations], ascending, minutes. */
  readonly durationsMin: readonly number[];
  /** Shape [periods], ascending, years. */
  readonly periodsYears: readonly number[];
  /** Shape [durations][periods], mm: rises with the period, does not fall with the duration. */
  readonly depthMm: readonly (readonly number[])[];
  /** Ends of the table's own interval; undefined where it has none. */
  readonly lowMm?: readonly (readonly number[])[];
  readonly highMm?: readonly (readonly number[])[];
}

/** What a point depth is multiplied by to give the mean over an area, by duration and area. */
export interface ArealReductionTable {
  readonly source: string;
  /** Shape [durations], ascending, minutes. */
  readonly durationsMin: readonly number[];
  /** Shape [areas], ascending, km². */
  readonly areasKm2: readonly number[];
  /** Shape [durations][areas], above 0 to 1. */
  readonly factor: readonly (readonly number[])[];
}
