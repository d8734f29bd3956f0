import { GrowingNumbers } from "./growing.ts";

/** Readings of one gauge as they are made: each covers (start, end], in order, none over another. */
export class ReadingList {
  readonly startEpochMs = new GrowingNumbers();
  readonly endEpochMs = new GrowingNumbers();
  readonly depthMm = new GrowingNumbers();
  readonly quality = new GrowingNumbers();

  get length(): number {
    return this.endEpochMs.length;
  }

  /** End of the last reading, or minus infinity. */
  get lastEndEpochMs(): number {
    return this.length === 0 ? Number.NEGATIVE_INFINITY : this.endEpochMs.view()[this.length - 1];
  }

  add(startEpochMs: number, endEpochMs: number, depthMm: number, quality: number): void {
    this.startEpochMs.push(startEpochMs);
    this.endEpochMs.push(endEpochMs);
    this.depthMm.push(depthMm);
    this.quality.push(quality);
  }
}
