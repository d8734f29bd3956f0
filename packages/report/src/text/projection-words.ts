/** Projections by their names in PROJ strings, as the trade calls them. */
const NAMES: Readonly<Record<string, string>> = {
  aea: "an Albers equal-area projection",
  aeqd: "an azimuthal equidistant projection",
  laea: "a Lambert azimuthal equal-area projection",
  lcc: "a Lambert conformal conic projection",
  merc: "a Mercator projection",
  stere: "a stereographic projection",
  tmerc: "a transverse Mercator projection",
};

/**
 * A projection in words: what a reader of a map needs of it. The exact definition stands in the provenance.
 *
 * @param crs - EPSG code, PROJ string or well-known text; codes are words enough
 */
export function projectionWords(crs: string): string {
  if (/^EPSG:\d+$/i.test(crs)) return crs;
  const parameters = new Map(
    [...crs.matchAll(/\+(\w+)=(\S+)/g)].map(([, key, value]) => [key, value] as const),
  );
  const zone = parameters.get("zone");
  if (parameters.get("proj") === "utm" && zone !== undefined) return `UTM zone ${zone}`;
  const name = NAMES[parameters.get("proj") ?? ""];
  if (name === undefined) return "the map's own projection";
  const lat = degrees(parameters.get("lat_0"), "N", "S");
  const lon = degrees(parameters.get("lon_0"), "E", "W");
  return lat === undefined || lon === undefined ? name : `${name} about ${lat}, ${lon}`;
}

function degrees(text: string | undefined, positive: string, negative: string): string | undefined {
  const value = Number(text);
  if (text === undefined || !Number.isFinite(value)) return undefined;
  return `${Math.abs(value)}° ${value < 0 ? negative : positive}`;
}
