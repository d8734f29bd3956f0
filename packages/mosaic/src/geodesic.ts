import geodesicLibrary from "geographiclib-geodesic";

const { Geodesic } = geodesicLibrary;
const wgs84 = Geodesic.WGS84;

/**
 * The point reached from a site on the WGS 84 ellipsoid (Karney 2013, Journal of Geodesy 87, 43-55).
 *
 * @param azimuthDeg - clockwise from true north
 * @param distanceM - along the ellipsoid
 */
export function geodesicDirect(
  site: { readonly lonDeg: number; readonly latDeg: number },
  azimuthDeg: number,
  distanceM: number,
): { lonDeg: number; latDeg: number } {
  const end = wgs84.Direct(site.latDeg, site.lonDeg, azimuthDeg, distanceM);
  return { lonDeg: end.lon2 as number, latDeg: end.lat2 as number };
}

/** Distance and azimuth at the site (0 to 360, clockwise from north) of a point, on the WGS 84 ellipsoid. */
export function geodesicInverse(
  site: { readonly lonDeg: number; readonly latDeg: number },
  point: { readonly lonDeg: number; readonly latDeg: number },
): { distanceM: number; azimuthDeg: number } {
  const line = wgs84.Inverse(site.latDeg, site.lonDeg, point.latDeg, point.lonDeg);
  const azimuth = line.azi1 as number;
  return { distanceM: line.s12 as number, azimuthDeg: azimuth < 0 ? azimuth + 360 : azimuth };
}
