import type { Grid } from "@rainreckon/core";
import { anisotropyOf } from "./anisotropy.ts";
import { CUTOFF_SHARE, fitted, longestDistanceKm } from "./interpolate.ts";
import type { VariogramModel, VariogramShape } from "./variogram-model.ts";

/** About so many cells stand for the field. */
const SAMPLE_CELLS = 500;

/**
 * The variogram of a radar field, with a sill of 1: what stands in where gauges are too few to have one of
 * their own, and says along which direction values keep together, if any. Cells are taken at even steps, so that it is the same on every run.
 *
 * @param totalMm - shape [ny, nx]; NaN is not observed
 * @returns undefined where the field does not vary
 */
export function radarVariogram(
  grid: Grid,
  totalMm: Float32Array,
  shape: VariogramShape,
): VariogramModel | undefined {
  const step = Math.max(1, Math.floor(Math.sqrt((grid.nx * grid.ny) / SAMPLE_CELLS)));
  const xKm: number[] = [];
  const yKm: number[] = [];
  const values: number[] = [];
  for (let row = step >> 1; row < grid.ny; row += step) {
    for (let column = step >> 1; column < grid.nx; column += step) {
      const value = totalMm[row * grid.nx + column];
      if (Number.isNaN(value)) continue;
      xKm.push((column * grid.cellM) / 1000);
      yKm.push((-row * grid.cellM) / 1000);
      values.push(value);
    }
  }
  const places = { xKm, yKm };
  const anisotropy = anisotropyOf(places, values, shape, CUTOFF_SHARE * longestDistanceKm(places));
  const model = fitted(places, values, shape, anisotropy);
  const sill = model === undefined ? 0 : model.nugget + model.partialSill;
  if (model === undefined || !(sill > 0)) return undefined;
  return { ...model, nugget: model.nugget / sill, partialSill: model.partialSill / sill };
}
