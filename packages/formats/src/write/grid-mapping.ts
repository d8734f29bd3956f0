import { isOneParallel, isPolar } from "./method.ts";
import type { Projection } from "./projection.ts";

/** An attribute of NetCDF: text, a number, or several. */
export type AttributeValue = string | number | readonly number[];

/**
 * CF attributes of a grid mapping variable.
 *
 * @returns the attributes; without `grid_mapping_name` where CF has no name for the method or cannot
 *   say all of its parameters, so that a reader turns to `lat` and `lon` instead of a wrong place
 * @remarks CF Conventions 1.8 (2020), appendix F, "Grid Mappings" (from memory, held against GDAL in tests).
 */
export function gridMappingAttributes(projection: Projection): Record<string, AttributeValue> {
  return { ...methodAttributes(projection), ...earthAttributes(projection) };
}

function methodAttributes(projection: Projection): Record<string, AttributeValue> {
  const offsets = { false_easting: projection.falseEastingM, false_northing: projection.falseNorthingM };
  const centre = {
    longitude_of_projection_origin: projection.longitudeOfOriginDeg,
    latitude_of_projection_origin: projection.latitudeOfOriginDeg,
  };
  const meridian = {
    longitude_of_central_meridian: projection.longitudeOfOriginDeg,
    latitude_of_projection_origin: projection.latitudeOfOriginDeg,
  };
  switch (projection.method) {
    case "laea":
      return { grid_mapping_name: "lambert_azimuthal_equal_area", ...centre, ...offsets };
    case "aeqd":
      return { grid_mapping_name: "azimuthal_equidistant", ...centre, ...offsets };
    case "tmerc":
      return {
        grid_mapping_name: "transverse_mercator",
        scale_factor_at_central_meridian: projection.scale,
        ...meridian,
        ...offsets,
      };
    case "stere":
      if (isPolar(projection)) return { ...polarAttributes(projection), ...offsets };
      return {
        grid_mapping_name: "stereographic",
        scale_factor_at_projection_origin: projection.scale,
        ...centre,
        ...offsets,
      };
    case "lcc":
      // CF has no scale factor for the cone, so a reduced one cannot be said.
      if (projection.parallel1Deg === undefined || projection.scale !== 1) return {};
      return {
        grid_mapping_name: "lambert_conformal_conic",
        standard_parallel: isOneParallel(projection)
          ? projection.parallel1Deg
          : [projection.parallel1Deg, projection.parallel2Deg ?? projection.parallel1Deg],
        ...meridian,
        ...offsets,
      };
    case "aea":
      if (projection.parallel1Deg === undefined) return {};
      return {
        grid_mapping_name: "albers_conical_equal_area",
        standard_parallel: [projection.parallel1Deg, projection.parallel2Deg ?? projection.parallel1Deg],
        ...meridian,
        ...offsets,
      };
    default:
      return {};
  }
}

function polarAttributes(projection: Projection): Record<string, AttributeValue> {
  return {
    grid_mapping_name: "polar_stereographic",
    straight_vertical_longitude_from_pole: projection.longitudeOfOriginDeg,
    latitude_of_projection_origin: projection.latitudeOfOriginDeg,
    ...(projection.trueScaleDeg === undefined
      ? { scale_factor_at_projection_origin: projection.scale }
      : { standard_parallel: projection.trueScaleDeg }),
  };
}

function earthAttributes({ ellipsoid, towgs84 }: Projection): Record<string, AttributeValue> {
  const figure: Record<string, AttributeValue> =
    ellipsoid.inverseFlattening === 0
      ? { earth_radius: ellipsoid.semiMajorM }
      : { semi_major_axis: ellipsoid.semiMajorM, inverse_flattening: ellipsoid.inverseFlattening };
  return {
    ...figure,
    ...(ellipsoid.name === undefined ? {} : { reference_ellipsoid_name: ellipsoid.name }),
    longitude_of_prime_meridian: 0,
    ...(towgs84 === undefined ? {} : { towgs84 }),
  };
}
