import { readHeadText } from "./delimited.ts";
import { type GeoJsonFeature, readGeoJson } from "./geojson.ts";

const ID_WORDS = /^(id|.*_id|.*[ -]id|fid|code|.*code|key|ref|no|nr|number|gid)$/i;
const NAME_WORDS = /name|label|title|bezeichnung|nom/i;

/** What a GeoJSON file holds, as far as a survey needs to know. */
export interface GeoJsonGuess {
  readonly featureCount: number;
  /** Features whose geometry is a Polygon or MultiPolygon. */
  readonly polygonCount: number;
  /** Coordinate system that the file names; undefined is longitude, latitude. */
  readonly crs?: string;
  /** Properties of the features, in the order of the file. */
  readonly fields: readonly GeoJsonField[];
  /** Guessed: fields that may be the id (filled in every polygon, each time differently), best first. */
  readonly idFields: readonly string[];
  /** Guessed: fields that may be the name, best first. */
  readonly nameFields: readonly string[];
  /** West, south, east, north of all polygons, in the file's coordinates. */
  readonly bounds?: readonly [number, number, number, number];
}

export interface GeoJsonField {
  readonly name: string;
  /** Features in which it is filled, and how many different values it has. */
  readonly filled: number;
  readonly distinct: number;
  readonly type: "text" | "number" | "mixed";
}

/**
 * Looks at a file that may be GeoJSON.
 *
 * @returns undefined where its first 64 KiB are not those of a FeatureCollection or Feature
 * @throws InputError where they are, but the file cannot be read
 */
export async function sniffGeoJson(path: string): Promise<GeoJsonGuess | undefined> {
  const head = await readHeadText(path);
  if (!/^\s*\{/.test(head) || !/"type"\s*:\s*"(FeatureCollection|Feature)"/.test(head)) return undefined;
  const { features: all, crs } = await readGeoJson(path);
  const features = all.filter((feature): feature is GeoJsonFeature => typeof feature !== "string");
  const polygons = features.filter(
    ({ geometry }) => geometry?.type === "Polygon" || geometry?.type === "MultiPolygon",
  );
  const fields = fieldsOf(polygons.length > 0 ? polygons : features);
  const count = polygons.length > 0 ? polygons.length : features.length;
  const unique = fields.filter(({ filled, distinct }) => filled === count && distinct === count);
  const bounds = boundsOf(polygons);
  return {
    featureCount: all.length,
    polygonCount: polygons.length,
    ...(crs === undefined ? {} : { crs }),
    fields,
    idFields: wordsFirst(unique, ID_WORDS).map(({ name }) => name),
    nameFields: wordsFirst(
      fields.filter(({ type, filled }) => type === "text" && filled > 0),
      NAME_WORDS,
    ).map(({ name }) => name),
    ...(bounds === undefined ? {} : { bounds }),
  };
}

function fieldsOf(features: readonly GeoJsonFeature[]): GeoJsonField[] {
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
      field.types.add(typeof value === "number" ? "number" : "text");
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
function wordsFirst(fields: readonly GeoJsonField[], words: RegExp): readonly GeoJsonField[] {
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
