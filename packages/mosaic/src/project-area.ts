import type { Catchment, Ring } from "@rainreckon/core";
import { type Projection, projection } from "./projection.ts";

/**
 * The rings of a catchment in the coordinates of a grid's map.
 *
 * An edge is straight in the file's own coordinates, not on the map: long edges are cut into pieces of at
 * most `maxPieceM` before they are projected.
 *
 * @returns polygons of [x, y] in metres, and the WGS 84 rings that they were made from
 * @throws InputError (usage) for a coordinate system that is not known or needs a shift grid
 */
export function projectArea(
  catchment: Catchment,
  map: Projection,
  maxPieceM: number,
): { readonly onMap: Ring[][]; readonly wgs84: Ring[][] } {
  const own = catchment.crs === undefined ? undefined : projection(catchment.crs);
  const toWgs84 = (x: number, y: number): readonly [number, number] =>
    own === undefined || own.geographic ? [x, y] : own.inverse(x, y);
  const onMap: Ring[][] = [];
  const wgs84: Ring[][] = [];
  for (const polygon of catchment.polygons) {
    const mapRings: Ring[] = [];
    const geoRings: Ring[] = [];
    for (const ring of polygon) {
      const mapRing: [number, number][] = [];
      const geoRing: [number, number][] = [];
      for (let i = 0; i < ring.length; i++) {
        const [x, y] = ring[i];
        const here = toWgs84(x, y);
        const hereOnMap = map.forward(here[0], here[1]);
        if (i > 0) {
          const [x0, y0] = ring[i - 1];
          const before = mapRing[mapRing.length - 1];
          const pieces = Math.min(
            1000,
            Math.ceil(Math.hypot(hereOnMap[0] - before[0], hereOnMap[1] - before[1]) / maxPieceM),
          );
          for (let k = 1; k < pieces; k++) {
            const u = k / pieces;
            const [lonDeg, latDeg] = toWgs84(x0 + u * (x - x0), y0 + u * (y - y0));
            const [xM, yM] = map.forward(lonDeg, latDeg);
            mapRing.push([xM, yM]);
          }
        }
        mapRing.push([hereOnMap[0], hereOnMap[1]]);
        geoRing.push([here[0], here[1]]);
      }
      mapRings.push(mapRing);
      geoRings.push(geoRing);
    }
    onMap.push(mapRings);
    wgs84.push(geoRings);
  }
  return { onMap, wgs84 };
}
