import type { Grid } from "@rainreckon/core";
import type { ArealSource } from "./areal.ts";

/** The cells that stand for a gauge: its own cell, or the 3 × 3 around it (fewer at the grid's edge). */
export function cellsForPoint(
  grid: Pick<Grid, "nx" | "ny">,
  cell: number,
  rule: "nearest" | "mean3x3",
): number[] {
  if (cell < 0) return [];
  if (rule === "nearest") return [cell];
  const column = cell % grid.nx;
  const row = (cell - column) / grid.nx;
  const cells: number[] = [];
  for (let dr = -1; dr <= 1; dr++) {
    for (let dc = -1; dc <= 1; dc++) {
      const [r, c] = [row + dr, column + dc];
      if (r >= 0 && r < grid.ny && c >= 0 && c < grid.nx) cells.push(r * grid.nx + c);
    }
  }
  return cells;
}

/**
 * Mean depth of a few cells over the time they were observed, and the mean share of the step observed.
 * Cells that observed nothing stay out of the depth and count 0 in the share.
 */
export function pointDepth(
  cells: readonly number[],
  part: Pick<ArealSource, "depthMm" | "observedMs">,
  lengthMs: number,
): { depthMm: number; observedFraction: number } {
  let depth = 0;
  let seen = 0;
  let observed = 0;
  for (const cell of cells) {
    const depthMm = part.depthMm[cell];
    if (Number.isNaN(depthMm)) continue;
    depth += depthMm;
    observed += part.observedMs[cell];
    seen++;
  }
  if (seen === 0) return { depthMm: Number.NaN, observedFraction: 0 };
  return { depthMm: depth / seen, observedFraction: Math.min(1, observed / cells.length / lengthMs) };
}
