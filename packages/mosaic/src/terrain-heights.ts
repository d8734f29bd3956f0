import type { RadarSite, TerrainGrid, TerrainRays } from "@rainreckon/core";
import { geodesicDirect } from "./geodesic.ts";
import { projection } from "./projection.ts";

/** Height of the ground above mean sea level at a place; NaN where it is not known. */
export type HeightAt = (lonDeg: number, latDeg: number) => number;

/**
 * Heights between the cell centres of a terrain model: bilinear. Beyond the outermost centres, and beside a cell without
 * a height, a place has the height of the cell that it lies in.
 *
 * @returns a function that gives NaN outside the model
 * @throws InputError (usage) where the model's coordinate system is not known
 */
export function terrainHeights(terrain: TerrainGrid): HeightAt {
  const { nx, ny, heightAslM, west, north, cellWidth, cellHeight } = terrain;
  const map = projection(terrain.crs);
  return (lonDeg, latDeg) => {
    let [x, y] = map.geographic ? [lonDeg, latDeg] : map.forward(lonDeg, latDeg);
    // A model may write its longitudes from 0 to 360, or lie across 180 degrees.
    if (map.geographic) x = west + ((((x - west) % 360) + 360) % 360);
    const column = (x - west) / cellWidth;
    const row = (north - y) / cellHeight;
    if (!(column >= 0 && column < nx && row >= 0 && row < ny)) return Number.NaN;
    const c = Math.min(Math.max(Math.floor(column - 0.5), 0), Math.max(0, nx - 2));
    const r = Math.min(Math.max(Math.floor(row - 0.5), 0), Math.max(0, ny - 2));
    const u = Math.min(Math.max(column - 0.5 - c, 0), 1);
    const v = Math.min(Math.max(row - 0.5 - r, 0), 1);
    const east = Math.min(c + 1, nx - 1);
    const south = Math.min(r + 1, ny - 1);
    const upper = heightAslM[r * nx + c] * (1 - u) + heightAslM[r * nx + east] * u;
    const lower = heightAslM[south * nx + c] * (1 - u) + heightAslM[south * nx + east] * u;
    const height = upper * (1 - v) + lower * v;
    return Number.isNaN(height) ? heightAslM[Math.floor(row) * nx + Math.floor(column)] : height;
  };
}

/** How terrain is sampled round a radar. */
export interface TerrainSampling {
  /** Distance along the ground up to which terrain matters. */
  readonly reachM: number;
  /** Along a ray; at most half a cell of the terrain model, or crests are stepped over. */
  readonly stepM: number;
  readonly rayCount: number;
}

/** Rays every half degree and points every 200 m (house rule): finer than a beam, and than common terrain models need. */
export const TERRAIN_SAMPLING = { stepM: 200, rayCount: 720 } as const;

/** Ground spacing of exactly solved points; in between longitude and latitude bend by about a metre. */
const NODE_SPACING_M = 5000;

/**
 * Terrain along rays that divide a radar's horizon evenly, once per radar.
 *
 * @returns with the points counted where `heightAt` knows nothing; see `terrainCaution`
 */
export function terrainAlongRays(
  heightAt: HeightAt,
  site: RadarSite,
  { reachM, stepM, rayCount }: TerrainSampling,
): TerrainRays {
  const pointCount = Math.max(1, Math.ceil(reachM / stepM));
  const nodeCount = Math.ceil((pointCount * stepM) / NODE_SPACING_M) + 1;
  const heightAslM = new Float32Array(rayCount * pointCount);
  const lon = new Float64Array(nodeCount);
  const lat = new Float64Array(nodeCount);
  let uncoveredPoints = 0;
  for (let ray = 0; ray < rayCount; ray++) {
    const azimuthDeg = (ray * 360) / rayCount;
    for (let node = 0; node < nodeCount; node++) {
      const place = geodesicDirect(site, azimuthDeg, node * NODE_SPACING_M);
      // Relative to the site, so that a ray across 180 degrees stays in one piece.
      lon[node] = ((place.lonDeg - site.lonDeg + 540) % 360) - 180;
      lat[node] = place.latDeg;
    }
    for (let point = 0; point < pointCount; point++) {
      const along = ((point + 1) * stepM) / NODE_SPACING_M;
      const node = Math.min(Math.floor(along), nodeCount - 2);
      const u = along - node;
      const height = heightAt(
        site.lonDeg + lon[node] + u * (lon[node + 1] - lon[node]),
        lat[node] + u * (lat[node + 1] - lat[node]),
      );
      heightAslM[ray * pointCount + point] = height;
      if (Number.isNaN(height)) uncoveredPoints++;
    }
  }
  return { rayCount, pointCount, stepM, heightAslM, uncoveredPoints };
}
