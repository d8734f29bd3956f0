import type { GriddedHeader } from "@rainreckon/formats";
import { projection, type SourceCells } from "@rainreckon/mosaic";

/**
 * Where the cells of a gridded layer lie, with the projection that its place names.
 *
 * @throws InputError where its coordinate system is not known
 */
export function sourceCells({ place, nx, ny }: Pick<GriddedHeader, "place" | "nx" | "ny">): SourceCells {
  if (place.kind === "positions")
    return { kind: "positions", nx, ny, lonDeg: place.lonDeg, latDeg: place.latDeg };
  const map = projection(place.crs);
  const { cellWidth, cellHeight } = place;
  if (place.kind === "affine")
    return { kind: "even", nx, ny, map, west: place.west, north: place.north, cellWidth, cellHeight };
  const [west, north] = map.geographic
    ? [place.lonDeg, place.latDeg]
    : map.forward(place.lonDeg, place.latDeg);
  return { kind: "even", nx, ny, map, west, north, cellWidth, cellHeight };
}
