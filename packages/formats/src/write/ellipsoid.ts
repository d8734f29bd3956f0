/** A figure of the Earth. A sphere has no flattening. */
export interface Ellipsoid {
  /** EPSG's name and code, where it is one that EPSG lists. */
  readonly name?: string;
  readonly epsg?: number;
  readonly semiMajorM: number;
  /** 0 for a sphere, as GeoTIFF and CF write it. */
  readonly inverseFlattening: number;
}

/**
 * Ellipsoids by the name that PROJ strings use.
 *
 * Source: EPSG Geodetic Parameter Dataset, ellipsoid table (from memory, held against PROJ's own list in tests).
 */
export const ELLIPSOIDS: Readonly<Record<string, Ellipsoid>> = {
  WGS84: { name: "WGS 84", epsg: 7030, semiMajorM: 6378137, inverseFlattening: 298.257223563 },
  GRS80: { name: "GRS 1980", epsg: 7019, semiMajorM: 6378137, inverseFlattening: 298.257222101 },
  WGS72: { name: "WGS 72", epsg: 7043, semiMajorM: 6378135, inverseFlattening: 298.26 },
  GRS67: { name: "GRS 1967", epsg: 7036, semiMajorM: 6378160, inverseFlattening: 298.247167427 },
  bessel: { name: "Bessel 1841", epsg: 7004, semiMajorM: 6377397.155, inverseFlattening: 299.1528128 },
  intl: { name: "International 1924", epsg: 7022, semiMajorM: 6378388, inverseFlattening: 297 },
  krass: { name: "Krassowsky 1940", epsg: 7024, semiMajorM: 6378245, inverseFlattening: 298.3 },
  airy: { name: "Airy 1830", epsg: 7001, semiMajorM: 6377563.396, inverseFlattening: 299.3249646 },
  mod_airy: {
    name: "Airy Modified 1849",
    epsg: 7002,
    semiMajorM: 6377340.189,
    inverseFlattening: 299.3249646,
  },
  // EPSG defines this one by its two half axes.
  clrk66: {
    name: "Clarke 1866",
    epsg: 7008,
    semiMajorM: 6378206.4,
    inverseFlattening: inverseFlatteningOf(6378206.4, 6356583.8),
  },
  clrk80ign: {
    name: "Clarke 1880 (IGN)",
    epsg: 7011,
    semiMajorM: 6378249.2,
    inverseFlattening: 293.4660212936269,
  },
  aust_SA: {
    name: "Australian National Spheroid",
    epsg: 7003,
    semiMajorM: 6378160,
    inverseFlattening: 298.25,
  },
  helmert: { name: "Helmert 1906", epsg: 7020, semiMajorM: 6378200, inverseFlattening: 298.3 },
};

/** Inverse flattening from the two half axes; 0 when they are equal. */
export function inverseFlatteningOf(semiMajorM: number, semiMinorM: number): number {
  return semiMajorM === semiMinorM ? 0 : semiMajorM / (semiMajorM - semiMinorM);
}
