import { GrowingNumbers } from "./growing.ts";

/**
 * Added to the quality of a row whose reading covers all the time since the gauge's last value. It stays
 * within this folder: readings carry the plain quality.
 */
export const ACCUMULATED = 4;

/** One gauge's cells along a track. */
export class TrackColumn {
  readonly id: string;
  /** In mm, or mm/h of intensities; NaN is missing. */
  readonly values = new GrowingNumbers();
  readonly quality = new GrowingNumbers();
  /** Most decimals that a value was written with. */
  decimals = 0;

  constructor(id: string) {
    this.id = id;
  }

  /** @param quality - of the network's codes, with ACCUMULATED added where that holds */
  push(value: number, quality: number): void {
    this.values.push(value);
    this.quality.push(quality);
  }
}

/**
 * Rows of one file that share their stamps, in the order of the file: all rows of a wide file, or the rows
 * of one gauge of a long file.
 */
export class Track {
  readonly path: string;
  /** Instant of each stamp; of a stamp in a repeated hour the earlier one. */
  readonly epochMs = new GrowingNumbers();
  readonly line = new GrowingNumbers();
  /** By row: the later instant of a stamp in a repeated hour. */
  readonly laterMs = new Map<number, number>();
  readonly columns: TrackColumn[] = [];
  /** Spans (start, end] in which rows that had to be left out may lie. */
  readonly uncertain: { readonly startEpochMs: number; readonly endEpochMs: number }[] = [];

  constructor(path: string) {
    this.path = path;
  }

  /** Adds a stamp. The values of every column are to follow. */
  pushStamp(epochMs: number, laterMs: number, line: number): void {
    if (laterMs !== epochMs) this.laterMs.set(this.epochMs.length, laterMs);
    this.epochMs.push(epochMs);
    this.line.push(line);
  }
}
