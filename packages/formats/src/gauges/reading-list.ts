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
  /** Takes readings without a value off the end, as far as they go. */
  dropMissingTail(): void {
    let length = this.length;
    const depths = this.depthMm.view();
    while (length > 0 && Number.isNaN(depths[length - 1])) length -= 1;
    for (const column of [this.startEpochMs, this.endEpochMs, this.depthMm, this.quality]) {
      column.length = length;
    }
  }
}
