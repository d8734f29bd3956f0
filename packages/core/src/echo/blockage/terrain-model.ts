/** Heights of the ground on a raster, as a DEM file has them. Row 0 is the northernmost, column 0 the westernmost. */
export interface TerrainGrid {
  /** A PROJ string or an authority code such as "EPSG:4326". */
  readonly crs: string;
  /** Edges of cell (0, 0) in the grid's own coordinates: metres, or degrees where `crs` is geographic. */
  readonly west: number;
  readonly north: number;
  readonly cellWidth: number;
  readonly cellHeight: number;
  readonly nx: number;
  readonly ny: number;
  /** Shape [ny, nx], row-major: above mean sea level; NaN where the file has none. A height speaks for its cell's centre. */
  readonly heightAslM: Float32Array;
  /** Cells without a height that can be one. */
  readonly unknownCells: number;
}

/**
 * Terrain round a radar, along rays that divide the horizon evenly from north; ray k looks to k * 360 / rayCount degrees.
 */
export interface TerrainRays {
  readonly rayCount: number;
  readonly pointCount: number;
  /** Along the ground; the first point lies one such step from the antenna. */
  readonly stepM: number;
  /** Shape [rayCount * pointCount], ray by ray: above mean sea level; NaN where terrain is not known. */
  readonly heightAslM: Float32Array;
  /** Points outside the terrain model, or where it has no height. */
  readonly uncoveredPoints: number;
}

/** What is not covered, in words; undefined where all is. */
export function terrainCaution(rays: TerrainRays): string | undefined {
  const points = rays.rayCount * rays.pointCount;
  if (rays.uncoveredPoints === 0) return undefined;
  if (rays.uncoveredPoints === points)
    return "the terrain model does not cover the radar's surroundings at all";
  const percent = (100 * rays.uncoveredPoints) / points;
  return (
    `the terrain model does not cover ${percent < 1 ? "less than 1" : percent.toFixed(0)} % of the radar's ` +
    "surroundings: terrain there is taken to hide nothing"
  );
}
