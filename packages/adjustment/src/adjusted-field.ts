import { cellCentre, type Grid, type Interval } from "@rainreckon/core";
import type { RainShare } from "./at-gauge.ts";
import type { LearnedMethod } from "./methods.ts";

/** Turns the radar depth of intervals into adjusted depth. */
export interface FieldAdjuster {
  /**
   * Adjusted depth of an interval: a new array of the same shape. Never negative, NaN stays NaN.
   *
   * @param radarMm - shape [ny, nx]
   */
  interval(interval: Interval, radarMm: Float32Array): Float32Array;
}

export interface AdjustedFieldInput {
  readonly grid: Grid;
  /** Radar depth of the window, shape [ny, nx]; NaN is not observed. */
  readonly totalMm: Float32Array;
  /** Range from the radar that speaks in a cell, km; NaN where none does. Asked only where it matters. */
  readonly rangeKm: (cell: number) => number;
  readonly share: RainShare;
}

/**
 * A learned method on a grid.
 *
 * A factor multiplies each interval by its value in the middle of it. A field is made once, for the window,
 * and the shape of each cell in time is kept: an interval is its radar depth times adjusted over radar depth
 * of the window; unless intervals are learned by themselves. Where the radar saw nothing all window long but the method puts rain, that rain is spread
 * over the intervals as the gauges' mean was.
 */
export function fieldAdjuster(learned: LearnedMethod, input: AdjustedFieldInput): FieldAdjuster {
  if (learned.kind === "factor") {
    return {
      interval: ({ startEpochMs, endEpochMs }, radarMm) => {
        const factor = learned.factorAt((startEpochMs + endEpochMs) / 2);
        return radarMm.map((depth) => depth * factor);
      },
    };
  }
  const { grid, totalMm, rangeKm, share } = input;
  const ratio = new Float64Array(totalMm.length);
  const added = new Float64Array(totalMm.length);
  for (let cell = 0; cell < totalMm.length; cell++) {
    const total = totalMm[cell];
    if (Number.isNaN(total)) continue;
    const { xM, yM } = cellCentre(grid, cell);
    const adjusted = learned.depthMm(
      xM / 1000,
      yM / 1000,
      total,
      learned.usesRange ? rangeKm(cell) : Number.NaN,
    );
    if (total > 0) ratio[cell] = adjusted / total;
    else added[cell] = adjusted;
  }
  return {
    interval(interval, radarMm) {
      const own = learned.ofInterval?.(interval);
      if (own !== undefined) {
        return radarMm.map((depth, cell) => {
          if (Number.isNaN(depth)) return Number.NaN;
          const { xM, yM } = cellCentre(grid, cell);
          return own(xM / 1000, yM / 1000, depth, learned.usesRange ? rangeKm(cell) : Number.NaN);
        });
      }
      const part = share(interval);
      return radarMm.map((depth, cell) => depth * ratio[cell] + added[cell] * part);
    },
  };
}
