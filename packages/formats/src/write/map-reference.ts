import type { Grid } from "@rainreckon/core";

/** A grid together with all that its place on Earth needs; resolved by whoever projects. */
export interface MapReference {
  readonly grid: Grid;
  /** The grid's system as a PROJ string; equal to `grid.crs` unless that is an authority code. */
  readonly projString: string;
  /** Centre of the cell with that flat index, WGS 84. */
  readonly lonLat: (index: number) => { readonly lonDeg: number; readonly latDeg: number };
  /** The system as WKT, where there is one at hand. */
  readonly crsWkt?: string;
}

/** The number in "EPSG:3035", or undefined. */
export function epsgCodeOf(crs: string): number | undefined {
  const found = /^EPSG:(\d{1,5})$/i.exec(crs.trim());
  return found === null ? undefined : Number(found[1]);
}
