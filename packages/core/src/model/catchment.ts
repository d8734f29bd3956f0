/** A ring: [x, y] positions, first equal to last. */
export type Ring = readonly (readonly [number, number])[];

/** A catchment: an id, a name, and polygons (outer ring first, then holes). */
export interface Catchment {
  readonly id: string;
  readonly name: string;
  /** Polygons of longitude and latitude, degrees, WGS 84 unless `crs` says otherwise. */
  readonly polygons: readonly (readonly Ring[])[];
  /** Coordinate system of the rings as the file names it; undefined is WGS 84 longitude, latitude. */
  readonly crs?: string;
}
