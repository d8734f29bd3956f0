import type { Projection } from "./projection.ts";

/** True where a stereographic projection is centred on a pole. */
export function isPolar(projection: Projection): boolean {
  return Math.abs(projection.latitudeOfOriginDeg) === 90;
}

/** True where a conformal cone touches along the one parallel of its origin. */
export function isOneParallel({ parallel1Deg, parallel2Deg, latitudeOfOriginDeg }: Projection): boolean {
  return (parallel2Deg ?? parallel1Deg) === parallel1Deg && latitudeOfOriginDeg === parallel1Deg;
}
