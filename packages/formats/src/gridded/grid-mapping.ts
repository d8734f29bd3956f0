import { type NetcdfFile, numberAttribute, textAttribute } from "../netcdf/index.ts";

/**
 * The PROJ string or authority code of a CF grid mapping variable.
 *
 * @returns undefined where it is of a kind that is not read
 * @see CF Conventions 1.11 (2023), appendix F, "Grid Mappings"
 */
export function crsOfGridMapping(file: NetcdfFile, variable: string): string | undefined {
  const method = textAttribute(file, variable, "grid_mapping_name");
  const number = (name: string) => {
    const value = file.attribute(variable, name);
    return value instanceof Float64Array ? value[0] : typeof value === "number" ? value : undefined;
  };
  const projection = methodOf(file, variable, method, number);
  if (projection !== undefined) return `${projection} ${figure(number)} +units=m +no_defs`;
  if (method === "latitude_longitude") return `+proj=longlat ${figure(number)} +no_defs`;
  const said = ["proj4_params", "proj4", "proj4text", "proj_params"]
    .map((name) => textAttribute(file, variable, name))
    .find((text) => text?.includes("+proj="));
  return said ?? epsgOf(file, variable);
}

function epsgOf(file: NetcdfFile, variable: string): string | undefined {
  const code = textAttribute(file, variable, "epsg_code") ?? numberAttribute(file, variable, "epsg_code");
  const match = /(\d{4,6})$/.exec(String(code ?? ""));
  return match === null ? undefined : `EPSG:${match[1]}`;
}

type NumberOf = (name: string) => number | undefined;

function methodOf(
  file: NetcdfFile,
  variable: string,
  method: string | undefined,
  number: NumberOf,
): string | undefined {
  const lat0 = number("latitude_of_projection_origin") ?? 0;
  const lon0 = number("longitude_of_projection_origin") ?? number("longitude_of_central_meridian") ?? 0;
  const shift = `+x_0=${number("false_easting") ?? 0} +y_0=${number("false_northing") ?? 0}`;
  const [one, two] = standardParallels(file, variable);
  switch (method) {
    case "lambert_azimuthal_equal_area":
      return `+proj=laea +lat_0=${lat0} +lon_0=${lon0} ${shift}`;
    case "azimuthal_equidistant":
      return `+proj=aeqd +lat_0=${lat0} +lon_0=${lon0} ${shift}`;
    case "transverse_mercator": {
      const scale = number("scale_factor_at_central_meridian") ?? 1;
      return `+proj=tmerc +lat_0=${lat0} +lon_0=${lon0} +k=${scale} ${shift}`;
    }
    case "lambert_conformal_conic":
      return `+proj=lcc +lat_0=${lat0} +lon_0=${lon0} +lat_1=${one ?? lat0} +lat_2=${two ?? one ?? lat0} ${shift}`;
    case "albers_conical_equal_area":
      return `+proj=aea +lat_0=${lat0} +lon_0=${lon0} +lat_1=${one ?? lat0} +lat_2=${two ?? one ?? lat0} ${shift}`;
    case "polar_stereographic": {
      const pole = number("straight_vertical_longitude_from_pole") ?? lon0;
      const scale = number("scale_factor_at_projection_origin");
      const truth = one === undefined ? `+k_0=${scale ?? 1}` : `+lat_ts=${one}`;
      return `+proj=stere +lat_0=${lat0 < 0 ? -90 : 90} +lon_0=${pole} ${truth} ${shift}`;
    }
    case "stereographic": {
      const scale = number("scale_factor_at_projection_origin") ?? 1;
      return `+proj=stere +lat_0=${lat0} +lon_0=${lon0} +k_0=${scale} ${shift}`;
    }
    case "mercator": {
      const truth =
        one === undefined ? `+k=${number("scale_factor_at_projection_origin") ?? 1}` : `+lat_ts=${one}`;
      return `+proj=merc +lon_0=${lon0} ${truth} ${shift}`;
    }
    default:
      return undefined;
  }
}

function standardParallels(file: NetcdfFile, variable: string): readonly (number | undefined)[] {
  const value = file.attribute(variable, "standard_parallel");
  if (value instanceof Float64Array) return [value[0], value[1]];
  return [typeof value === "number" ? value : undefined, undefined];
}

/** The figure of the Earth; CF leaves it out where it does not matter, and WGS 84 then stands for it. */
function figure(number: NumberOf): string {
  const radius = number("earth_radius");
  if (radius !== undefined) return `+R=${radius}`;
  const major = number("semi_major_axis");
  const minor = number("semi_minor_axis");
  const flattening = number("inverse_flattening");
  if (major !== undefined && flattening !== undefined && flattening !== 0)
    return `+a=${major} +rf=${flattening}`;
  if (major !== undefined) return `+a=${major} +b=${minor ?? major}`;
  return "+datum=WGS84";
}
