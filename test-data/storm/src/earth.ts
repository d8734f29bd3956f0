/** WGS 84: equatorial radius in metres, flattening, and the square of the first eccentricity. */
const EQUATORIAL_M = 6378137;
const FLATTENING = 1 / 298.257223563;
const DEG = Math.PI / 180;

/** A place on WGS 84. */
export interface LonLat {
  readonly lonDeg: number;
  readonly latDeg: number;
}

/** A map plane: kilometres east and north of its origin. */
export interface Plane {
  /** The same projection as a PROJ string, in metres. */
  readonly proj: string;
  toPlane(place: LonLat): { xKm: number; yKm: number };
  toPlace(xKm: number, yKm: number): LonLat;
}

/** An ellipsoid by its equatorial radius in metres and the square of its first eccentricity. */
export interface Ellipsoid {
  readonly radiusM: number;
  readonly e2: number;
}

export const WGS84: Ellipsoid = { radiusM: EQUATORIAL_M, e2: FLATTENING * (2 - FLATTENING) };

/**
 * Lambert azimuthal equal-area projection of an ellipsoid, oblique aspect.
 * Source: Snyder (1987), Map Projections: A Working Manual, USGS Professional Paper 1395, p. 187-190.
 *
 * @param centre - the origin of the plane; not at a pole
 */
export function equalAreaPlane(centre: LonLat, ellipsoid: Ellipsoid = WGS84): Plane {
  const { radiusM, e2 } = ellipsoid;
  const e = Math.sqrt(e2);
  const q = (sinLat: number): number =>
    (1 - e2) *
    (sinLat / (1 - e2 * sinLat * sinLat) - Math.log((1 - e * sinLat) / (1 + e * sinLat)) / (2 * e));
  const qPole = q(1);
  const sinCentre = Math.sin(centre.latDeg * DEG);
  const sinBeta1 = q(sinCentre) / qPole;
  const cosBeta1 = Math.sqrt(1 - sinBeta1 * sinBeta1);
  const rq = radiusM * Math.sqrt(qPole / 2);
  const d =
    (radiusM * Math.cos(centre.latDeg * DEG)) / Math.sqrt(1 - e2 * sinCentre * sinCentre) / (rq * cosBeta1);

  return {
    proj: `+proj=laea +lat_0=${centre.latDeg} +lon_0=${centre.lonDeg} +x_0=0 +y_0=0 +datum=WGS84 +units=m +no_defs +type=crs`,
    toPlane({ lonDeg, latDeg }) {
      const sinBeta = q(Math.sin(latDeg * DEG)) / qPole;
      const cosBeta = Math.sqrt(1 - sinBeta * sinBeta);
      const turn = (lonDeg - centre.lonDeg) * DEG;
      const b = rq * Math.sqrt(2 / (1 + sinBeta1 * sinBeta + cosBeta1 * cosBeta * Math.cos(turn)));
      return {
        xKm: (b * d * cosBeta * Math.sin(turn)) / 1000,
        yKm: ((b / d) * (cosBeta1 * sinBeta - sinBeta1 * cosBeta * Math.cos(turn))) / 1000,
      };
    },
    toPlace(xKm, yKm) {
      const x = (xKm * 1000) / d;
      const y = yKm * 1000 * d;
      const rho = Math.hypot(x, y);
      if (rho === 0) return centre;
      const arc = 2 * Math.asin(rho / (2 * rq));
      const qHere = qPole * (Math.cos(arc) * sinBeta1 + (y * Math.sin(arc) * cosBeta1) / rho);
      const turn = Math.atan2(
        x * Math.sin(arc),
        rho * cosBeta1 * Math.cos(arc) - y * sinBeta1 * Math.sin(arc),
      );
      let lat = Math.asin(qHere / 2);
      // Snyder's equation 3-16: a few rounds reach rounding error.
      for (let round = 0; round < 6; round++) {
        const s = Math.sin(lat);
        const w = 1 - e2 * s * s;
        lat +=
          ((w * w) / (2 * Math.cos(lat))) *
          (qHere / (1 - e2) - s / w + Math.log((1 - e * s) / (1 + e * s)) / (2 * e));
      }
      return { lonDeg: centre.lonDeg + turn / DEG, latDeg: lat / DEG };
    },
  };
}

/**
 * The place at a distance and azimuth along a WGS 84 geodesic.
 * Source: Vincenty (1975), Survey Review 23(176), 88-93, direct formula.
 *
 * @param azimuthDeg - clockwise from north
 * @param distanceM - along the ellipsoid, from 0 to some thousand kilometres
 */
export function travel(from: LonLat, azimuthDeg: number, distanceM: number): LonLat {
  const a = EQUATORIAL_M;
  const f = FLATTENING;
  const b = a * (1 - f);
  const sinAzimuth = Math.sin(azimuthDeg * DEG);
  const cosAzimuth = Math.cos(azimuthDeg * DEG);
  const tanU1 = (1 - f) * Math.tan(from.latDeg * DEG);
  const cosU1 = 1 / Math.sqrt(1 + tanU1 * tanU1);
  const sinU1 = tanU1 * cosU1;
  const sigma1 = Math.atan2(tanU1, cosAzimuth);
  const sinAlpha = cosU1 * sinAzimuth;
  const cos2Alpha = 1 - sinAlpha * sinAlpha;
  const u2 = (cos2Alpha * (a * a - b * b)) / (b * b);
  const bigA = 1 + (u2 / 16384) * (4096 + u2 * (-768 + u2 * (320 - 175 * u2)));
  const bigB = (u2 / 1024) * (256 + u2 * (-128 + u2 * (74 - 47 * u2)));
  let sigma = distanceM / (b * bigA);
  let cos2m = 0;
  for (let round = 0; round < 8; round++) {
    cos2m = Math.cos(2 * sigma1 + sigma);
    const s = Math.sin(sigma);
    const inner =
      Math.cos(sigma) * (2 * cos2m * cos2m - 1) -
      (bigB / 6) * cos2m * (4 * s * s - 3) * (4 * cos2m * cos2m - 3);
    sigma = distanceM / (b * bigA) + bigB * s * (cos2m + (bigB / 4) * inner);
  }
  const sinSigma = Math.sin(sigma);
  const cosSigma = Math.cos(sigma);
  cos2m = Math.cos(2 * sigma1 + sigma);
  const across = sinU1 * sinSigma - cosU1 * cosSigma * cosAzimuth;
  const lat = Math.atan2(
    sinU1 * cosSigma + cosU1 * sinSigma * cosAzimuth,
    (1 - f) * Math.sqrt(sinAlpha * sinAlpha + across * across),
  );
  const lambda = Math.atan2(sinSigma * sinAzimuth, cosU1 * cosSigma - sinU1 * sinSigma * cosAzimuth);
  const c = (f / 16) * cos2Alpha * (4 + f * (4 - 3 * cos2Alpha));
  const turn =
    lambda -
    (1 - c) * f * sinAlpha * (sigma + c * sinSigma * (cos2m + c * cosSigma * (2 * cos2m * cos2m - 1)));
  return { lonDeg: from.lonDeg + turn / DEG, latDeg: lat / DEG };
}
