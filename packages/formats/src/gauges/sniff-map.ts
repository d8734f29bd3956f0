import { decimalOf } from "./decimal.ts";
import type { GeoJsonFeature } from "./geojson.ts";
import { geoPackageLayers } from "./geopackage.ts";
import { type MapFeatures, type MapOptions, mapFormatOf, readMapFeatures } from "./map-features.ts";

const ID_WORDS = /^(id|.*_id|.*[ -]id|fid|code|.*code|key|ref|no|nr|number|gid)$/i;
/** Ids that a database gives out by itself: another export may number otherwise, so they come last. */
const ROW_NUMBER_WORDS = /^(fid|ogc_fid|objectid|gid)$/i;
const NAME_WORDS = /name|label|title|bezeichnung|nom/i;

/** What a map file holds, as far as a survey needs to know. */
export interface MapGuess {
  readonly format: MapFeatures["format"];
  readonly featureCount: number;
  /** Features whose geometry is a Polygon or MultiPolygon. */
  readonly polygonCount: number;
  /** Coordinate system that the file names, a code or well-known text; undefined is longitude, latitude. */
  readonly crs?: string;
  /** False where the file does not say what its coordinates are. */
  readonly crsKnown: boolean;
  /** The layer looked at, where the file has layers; all that may hold polygons. */
  readonly layer?: string;
  readonly layers?: readonly string[];
  /** Properties of the features, in the order of the file. */
  readonly fields: readonly MapField[];
  /** Guessed: fields that may be the id (filled in every polygon, each time differently), best first. */
  readonly idFields: readonly string[];
  /** Guessed: fields that may be the name, best first. */
  readonly nameFields: readonly string[];
  /** West, south, east, north of all polygons, in the file's coordinates. */
  readonly bounds?: readonly [number, number, number, number];
}

export interface MapField {
  readonly name: string;
  /** Features in which it is filled, and how many different values it has. */
  readonly filled: number;
  readonly distinct: number;
  readonly type: "text" | "number" | "mixed";
}

/**
 * Looks at a file that may be a map: GeoJSON, the .shp of a Shapefile, or a GeoPackage. It is read whole.
 *
 * @returns undefined where its first 64 KiB are not those of a map; of a GeoPackage with several layers and
 * none named, the first
 * @throws InputError where they are, but the file cannot be read
 */
export async function sniffMap(path: string, options: MapOptions = {}): Promise<MapGuess | undefined> {
  const format = await mapFormatOf(path);
  if (format === undefined) return undefined;
  const layers = format === "GeoPackage" && options.layer === undefined ? await geoPackageLayers(path) : [];
  const [layer] = layers;
  const map = await readMapFeatures(path, layer === undefined ? options : { ...options, layer });
  const { features: all, crs } = map;
  const features = all.filter((feature): feature is GeoJsonFeature => typeof feature !== "string");
  const polygons = features.filter(
    ({ geometry }) => geometry?.type === "Polygon" || geometry?.type === "MultiPolygon",
  );
  const fields = fieldsOf(polygons.length > 0 ? polygons : features, format !== "GeoJSON");
  const count = polygons.length > 0 ? polygons.length : features.length;
  const unique = fields.filter(({ filled, distinct }) => filled === count && distinct === count);
  const bounds = boundsOf(polygons);
  return {
    format,
    featureCount: all.length,
    polygonCount: polygons.length,
    ...(crs === undefined ? {} : { crs }),
    crsKnown: map.crsKnown,
    ...(map.layer === undefined ? {} : { layer: map.layer }),
    ...(map.layers === undefined ? {} : { layers: map.layers }),
    fields,
    idFields: [
      ...wordsFirst(unique, ID_WORDS).filter(({ name }) => !ROW_NUMBER_WORDS.test(name)),
      ...unique.filter(({ name }) => ROW_NUMBER_WORDS.test(name)),
    ].map(({ name }) => name),
    nameFields: wordsFirst(
      fields.filter(({ type, filled }) => type === "text" && filled > 0),
      NAME_WORDS,
    ).map(({ name }) => name),
    ...(bounds === undefined ? {} : { bounds }),
  };
}

/** @param numbersAreText - whether the format's reader hands numbers over as they are written */
function fieldsOf(features: readonly GeoJsonFeature[], numbersAreText: boolean): MapField[] {
  const values = new Map<string, { seen: Set<unknown>; filled: number; types: Set<string> }>();
  for (const { properties } of features) {
    for (const [name, value] of Object.entries(properties ?? {})) {
      if (value === null || value === undefined || value === "" || typeof value === "object") continue;
      let field = values.get(name);
      if (field === undefined) {
        field = { seen: new Set(), filled: 0, types: new Set() };
        values.set(name, field);
      }
      field.seen.add(value);
      field.filled += 1;
      const isNumber =
        typeof value === "number" || (numbersAreText && !Number.isNaN(decimalOf(String(value))));
      field.types.add(isNumber ? "number" : "text");
    }
  }
  return [...values].map(([name, { seen, filled, types }]) => ({
    name,
    filled,
    distinct: seen.size,
    type: types.size > 1 ? "mixed" : types.has("number") ? "number" : "text",
  }));
}

/** Fields whose header is one of the words, then the others, each in the order of the file. */
function wordsFirst(fields: readonly MapField[], words: RegExp): readonly MapField[] {
  return [
    ...fields.filter(({ name }) => words.test(name)),
    ...fields.filter(({ name }) => !words.test(name)),
  ];
}

function boundsOf(
  features: readonly GeoJsonFeature[],
): readonly [number, number, number, number] | undefined {
  const bounds: [number, number, number, number] = [
    Number.POSITIVE_INFINITY,
    Number.POSITIVE_INFINITY,
    Number.NEGATIVE_INFINITY,
    Number.NEGATIVE_INFINITY,
  ];
  const widen = (item: unknown, depth: number) => {
    if (!Array.isArray(item) || depth > 4) return;
    const [x, y] = item;
    if (typeof x === "number" && typeof y === "number") {
      bounds[0] = Math.min(bounds[0], x);
      bounds[1] = Math.min(bounds[1], y);
      bounds[2] = Math.max(bounds[2], x);
      bounds[3] = Math.max(bounds[3], y);
    } else for (const part of item) widen(part, depth + 1);
  };
  for (const { geometry } of features) widen(geometry?.coordinates, 0);
  return bounds[0] <= bounds[2] ? bounds : undefined;
}
