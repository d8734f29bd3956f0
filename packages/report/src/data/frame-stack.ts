import type { Interval } from "@rainreckon/core";
import { pictureBlock, thin } from "../map/thin.ts";

/** More frames than this are joined: nobody steps through more, and they would weigh on the file. */
export const MOST_FRAMES = 96;

/** Depths of the intervals of a window, thinned for the page. */
export interface FrameSeries {
  /** The layer of the map that they add up to. */
  readonly layerId: string;
  /** Shape of each field. */
  readonly nx: number;
  readonly ny: number;
  /** Grid cells to a side of one cell of a field. */
  readonly block: number;
  /** How many intervals make a frame. */
  readonly joined: number;
  readonly frames: readonly (Interval & {
    /** Depth over the observed part, mm; NaN where nothing was observed. */
    readonly depthMm: Float32Array;
  })[];
}

/**
 * Takes the depth of each interval in time order, and keeps no more of them than the page shows.
 *
 * Fields are thinned to the mean of the observed cells; where there are more intervals than frames, neighbours
 * are added up over what was observed of them.
 */
export class FrameStack {
  readonly #layerId: string;
  readonly #grid: { readonly nx: number; readonly ny: number };
  readonly #joined: number;
  readonly #frames: { startEpochMs: number; endEpochMs: number; depthMm: Float32Array }[] = [];
  #taken = 0;

  /** @param intervalCount - how many intervals will come */
  constructor(layerId: string, grid: { readonly nx: number; readonly ny: number }, intervalCount: number) {
    this.#layerId = layerId;
    this.#grid = grid;
    this.#joined = Math.max(1, Math.ceil(intervalCount / MOST_FRAMES));
  }

  /** @param depthMm - shape [ny, nx] of the grid; NaN where nothing was observed */
  add({ startEpochMs, endEpochMs }: Interval, depthMm: Float32Array): void {
    const { nx, ny } = this.#grid;
    const values = Float32Array.from(thin(depthMm, nx, ny, "mean").values);
    if (this.#taken % this.#joined === 0) {
      this.#frames.push({ startEpochMs, endEpochMs, depthMm: values });
    } else {
      const frame = this.#frames[this.#frames.length - 1];
      frame.endEpochMs = endEpochMs;
      for (const [cell, mm] of values.entries()) {
        if (Number.isNaN(mm)) continue;
        frame.depthMm[cell] = Number.isNaN(frame.depthMm[cell]) ? mm : frame.depthMm[cell] + mm;
      }
    }
    this.#taken += 1;
  }

  finish(): FrameSeries {
    const { nx, ny } = this.#grid;
    const block = pictureBlock(nx, ny);
    return {
      layerId: this.#layerId,
      nx: Math.ceil(nx / block),
      ny: Math.ceil(ny / block),
      block,
      joined: this.#joined,
      frames: this.#frames,
    };
  }
}
