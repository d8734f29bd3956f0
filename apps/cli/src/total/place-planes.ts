import type { CellFractions, FieldSum } from "@rainreckon/accumulation";
import { cellsForPoint } from "@rainreckon/accumulation";
import type { Grid } from "@rainreckon/core";
import { companionIndex } from "./companions.ts";

/** Share of an area's depth over the window that a companion of kind "depth" stands for; NaN where it never rained. */
export function shareOfDepth({ cells, fraction }: CellFractions, sum: FieldSum, name: string): number {
  const values = sum.companions[companionIndex(name)];
  let part = 0;
  let whole = 0;
  for (let k = 0; k < cells.length; k++) {
    const depthMm = sum.depthMm[cells[k]];
    if (!(depthMm > 0)) continue;
    whole += fraction[k] * depthMm;
    part += fraction[k] * (values?.[cells[k]] ?? 0);
  }
  return whole > 0 ? Math.min(1, part / whole) : Number.NaN;
}

/** Least and most of a cell and the eight about it; undefined where none was observed. */
export function rangeOf3x3(
  grid: Grid,
  values: Float32Array,
  cell: number,
): { readonly leastMm: number; readonly mostMm: number; readonly cellCount: number } | undefined {
  const seen = cellsForPoint(grid, cell, "mean3x3")
    .map((one) => values[one])
    .filter((mm) => !Number.isNaN(mm));
  if (seen.length === 0) return undefined;
  return { leastMm: Math.min(...seen), mostMm: Math.max(...seen), cellCount: seen.length };
}
