/** A span of time (start, end]: what is stamped exactly on a border belongs to the interval ending there. */
export interface Interval {
  readonly startEpochMs: number;
  readonly endEpochMs: number;
}
