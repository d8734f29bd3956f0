/** A gauge further than this from every radar is no use to the job; one within it may be. */
const NEAR_KM = 300;
/** Mean radius of the Earth (IUGG R1), km. */
const EARTH_RADIUS_KM = 6371.0088;

/**
 * Whether a position makes sense only with longitude and latitude exchanged: it is more than 300 km from
 * each of the places, or no position at all, and within 300 km of one of them when exchanged.
 *
 * @param lonDeg - as given; `latDeg` likewise
 * @param near - where the position ought to be near, such as the radars
 */
export function looksSwapped(
  lonDeg: number,
  latDeg: number,
  near: readonly { readonly lonDeg: number; readonly latDeg: number }[],
): boolean {
  const isNear = (lon: number, lat: number) =>
    Math.abs(lat) <= 90 && near.some((place) => distanceKm(lon, lat, place.lonDeg, place.latDeg) <= NEAR_KM);
  return !isNear(lonDeg, latDeg) && isNear(latDeg, lonDeg);
}

/** Great-circle distance on a sphere, by the haversine formula (R. W. Sinnott 1984, Sky and Telescope 68, 159). */
function distanceKm(lonA: number, latA: number, lonB: number, latB: number): number {
  const toRad = Math.PI / 180;
  const sinLat = Math.sin(((latB - latA) * toRad) / 2);
  const sinLon = Math.sin(((lonB - lonA) * toRad) / 2);
  const a = sinLat ** 2 + Math.cos(latA * toRad) * Math.cos(latB * toRad) * sinLon ** 2;
  return 2 * EARTH_RADIUS_KM * Math.asin(Math.min(1, Math.sqrt(a)));
}
