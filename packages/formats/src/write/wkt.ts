import { isOneParallel, isPolar } from "./method.ts";
import type { Projection } from "./projection.ts";

const DATUM_NAMES: Readonly<Record<number, string>> = {
  4326: "WGS_1984",
  4269: "North_American_Datum_1983",
};

/**
 * A projected system as well-known text, version 1, with its shift to WGS 84.
 *
 * CF attributes alone lose that shift, and with it some 100 m, in readers that heed only this text.
 *
 * @returns undefined for a method that we have no words for
 * @remarks OGC 01-009 (2001), Coordinate Transformation Services, section 7; names of methods and parameters
 *   as GDAL's documentation of its projections lists them (from memory, held against GDAL in tests).
 */
export function wellKnownText(projection: Projection): string | undefined {
  const method = methodText(projection);
  if (method === undefined) return undefined;
  const parameters = {
    ...method.parameters,
    false_easting: projection.falseEastingM,
    false_northing: projection.falseNorthingM,
  };
  const parameterText = Object.entries(parameters).map(([name, value]) => `PARAMETER["${name}",${value}]`);
  return `PROJCS["unnamed",${geographicText(projection)},PROJECTION["${method.name}"],${parameterText.join(",")},UNIT["metre",1]]`;
}

function geographicText({ ellipsoid, geographicEpsg, towgs84 }: Projection): string {
  const spheroid = `SPHEROID["${ellipsoid.name ?? "unnamed"}",${ellipsoid.semiMajorM},${ellipsoid.inverseFlattening}]`;
  const sevenParameters = towgs84 && [...towgs84, 0, 0, 0, 0].slice(0, 7);
  const shift = sevenParameters === undefined ? "" : `,TOWGS84[${sevenParameters.join(",")}]`;
  const datum = geographicEpsg === undefined ? "unknown" : DATUM_NAMES[geographicEpsg];
  return `GEOGCS["unnamed",DATUM["${datum}",${spheroid}${shift}],PRIMEM["Greenwich",0],UNIT["degree",0.0174532925199433]]`;
}

function methodText(
  projection: Projection,
): { readonly name: string; readonly parameters: Readonly<Record<string, number>> } | undefined {
  const { latitudeOfOriginDeg, longitudeOfOriginDeg, scale, parallel1Deg } = projection;
  const centre = { latitude_of_center: latitudeOfOriginDeg, longitude_of_center: longitudeOfOriginDeg };
  const origin = { latitude_of_origin: latitudeOfOriginDeg, central_meridian: longitudeOfOriginDeg };
  const scaled = { ...origin, scale_factor: scale };
  const parallels =
    parallel1Deg === undefined
      ? undefined
      : { standard_parallel_1: parallel1Deg, standard_parallel_2: projection.parallel2Deg ?? parallel1Deg };
  switch (projection.method) {
    case "laea":
      return { name: "Lambert_Azimuthal_Equal_Area", parameters: centre };
    case "aeqd":
      return { name: "Azimuthal_Equidistant", parameters: centre };
    case "tmerc":
      return { name: "Transverse_Mercator", parameters: scaled };
    case "sterea":
      return { name: "Oblique_Stereographic", parameters: scaled };
    case "stere":
      if (!isPolar(projection)) return { name: "Stereographic", parameters: scaled };
      if (projection.trueScaleDeg === undefined) return { name: "Polar_Stereographic", parameters: scaled };
      return {
        name: "Polar_Stereographic",
        parameters: { ...scaled, latitude_of_origin: projection.trueScaleDeg, scale_factor: 1 },
      };
    case "lcc":
      if (isOneParallel(projection)) return { name: "Lambert_Conformal_Conic_1SP", parameters: scaled };
      if (parallels === undefined || scale !== 1) return undefined;
      return { name: "Lambert_Conformal_Conic_2SP", parameters: { ...parallels, ...origin } };
    case "aea":
      return parallels && { name: "Albers_Conic_Equal_Area", parameters: { ...parallels, ...centre } };
    default:
      return undefined;
  }
}
