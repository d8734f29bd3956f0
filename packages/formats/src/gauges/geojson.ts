import { open } from "node:fs/promises";
import { InputError } from "@rainreckon/core";
import { z } from "zod";
import { displayText } from "./display-text.ts";

/** Largest GeoJSON file that is opened, bytes. */
const MAX_GEOJSON_BYTES = 200 * 1024 ** 2;
/** Longest text in which a fault is searched for that the engine does not place, characters. */
const MAX_SEARCHED_LENGTH = 20_000_000;

const properties = z.record(z.string(), z.unknown()).nullish();

/** A feature as far as this reader looks: positions are checked where they are read. */
const featureSchema = z.object({
  type: z.literal("Feature"),
  id: z.union([z.string(), z.number()]).optional(),
  properties,
  geometry: z.object({ type: z.string(), coordinates: z.unknown().optional() }).nullish(),
});
export type GeoJsonFeature = z.output<typeof featureSchema>;

/** The `crs` member of GeoJSON as it was in 2008; RFC 7946 has none. */
const crsSchema = z.object({
  type: z.literal("name"),
  properties: z.object({ name: z.string().min(1).max(200) }),
});
const documentSchema = z.object({
  type: z.enum(["FeatureCollection", "Feature"]),
  features: z.array(z.unknown()).optional(),
  crs: z.unknown().optional(),
});

export interface GeoJsonDocument {
  /** What each feature turned out to be: a feature, or why it is none. Numbered from 1 in messages. */
  readonly features: readonly (GeoJsonFeature | string)[];
  /** Coordinate system named in the file, such as "EPSG:25832"; undefined is longitude, latitude. */
  readonly crs: string | undefined;
}

/**
 * Reads a GeoJSON FeatureCollection or Feature.
 *
 * @throws InputError where it cannot be opened, is larger than 200 MiB, is no JSON (with line and column),
 * is no such GeoJSON, or names its coordinate system in a way that cannot be followed
 */
export async function readGeoJson(path: string): Promise<GeoJsonDocument> {
  const json = parseJson(await readText(path), path);
  const document = documentSchema.safeParse(json);
  if (!document.success || (document.data.type === "FeatureCollection" && !document.data.features)) {
    throw new InputError(
      "this is no GeoJSON FeatureCollection or Feature",
      path,
      "export the polygons as GeoJSON (RFC 7946)",
    );
  }
  const raw = document.data.type === "Feature" ? [json] : (document.data.features ?? []);
  const features = raw.map((item) => {
    const feature = featureSchema.safeParse(item);
    if (feature.success) return feature.data;
    const { path: field, message } = feature.error.issues[0];
    return `${field.join(".") || "feature"}: ${message}`;
  });
  return { features, crs: namedCrs(document.data.crs, path) };
}

async function readText(path: string): Promise<string> {
  let file: Awaited<ReturnType<typeof open>>;
  try {
    file = await open(path, "r");
  } catch (cause) {
    throw new InputError("the file cannot be opened", path, "check that it is there and may be read", {
      cause,
    });
  }
  try {
    const { size } = await file.stat();
    if (size > MAX_GEOJSON_BYTES) {
      throw new InputError(
        `the file has ${size} bytes, more than ${MAX_GEOJSON_BYTES}`,
        path,
        "simplify the polygons",
      );
    }
    return (await file.readFile("utf8")).replace(/^\ufeff/, "");
  } finally {
    await file.close();
  }
}

function parseJson(text: string, path: string): unknown {
  try {
    return JSON.parse(text);
  } catch (cause) {
    const position = faultPosition(text, cause);
    const before = text.slice(0, position);
    const where =
      position === undefined
        ? path
        : `${path}, line ${before.split("\n").length}, column ${position - before.lastIndexOf("\n")}`;
    throw new InputError("this is not valid JSON", where, "write the file again; it may have been cut off", {
      cause,
    });
  }
}

/**
 * Where JSON goes wrong. The engine does not always say; the shortest beginning of the text that is wrong
 * in another way than by ending too early ends there.
 *
 * @returns undefined in a text too long to look for it
 */
function faultPosition(text: string, fault: unknown): number | undefined {
  const said = statedPosition(fault);
  if (said !== undefined) return said;
  if (text.length > MAX_SEARCHED_LENGTH) return undefined;
  let sound = 0;
  let broken = text.length + 1;
  while (broken - sound > 1) {
    const middle = (sound + broken) >> 1;
    if (isSoundSoFar(text.slice(0, middle))) sound = middle;
    else broken = middle;
  }
  return sound;
}

function isSoundSoFar(beginning: string): boolean {
  try {
    JSON.parse(beginning);
    return true;
  } catch (fault) {
    return (
      /end of JSON input|Unterminated/.test(String(fault)) || (statedPosition(fault) ?? 0) >= beginning.length
    );
  }
}

function statedPosition(fault: unknown): number | undefined {
  const position = /position (\d+)/.exec(String(fault))?.[1];
  return position === undefined ? undefined : Number(position);
}

/**
 * The name of a `crs` member as an authority code: `urn:ogc:def:crs:EPSG::25832` and
 * `http://www.opengis.net/def/crs/EPSG/0/25832` are "EPSG:25832". CRS84 and EPSG:4326 are undefined,
 * longitude before latitude: files of that time wrote EPSG:4326 in that order.
 */
function namedCrs(crs: unknown, path: string): string | undefined {
  if (crs === undefined || crs === null) return undefined;
  const named = crsSchema.safeParse(crs);
  if (!named.success) {
    throw new InputError(
      "the file's crs is not given by name",
      path,
      "convert the file to longitude and latitude, or name the crs in the plan and take the member out",
    );
  }
  const { name } = named.data.properties;
  if (/\bCRS84$/i.test(name)) return undefined;
  const code =
    /^urn:(?:x-)?ogc:def:crs:(\w+):[\w.]*:(\w+)$/i.exec(name) ??
    /^https?:\/\/www\.opengis\.net\/def\/crs\/(\w+)\/[\w.]+\/(\w+)$/i.exec(name) ??
    /^(\w+):(\w+)$/.exec(name);
  if (code === null) {
    throw new InputError(
      `the file's crs "${displayText(name, 80)}" cannot be understood`,
      path,
      'name it like "urn:ogc:def:crs:EPSG::25832"',
    );
  }
  const plain = `${code[1].toUpperCase()}:${code[2]}`;
  return plain === "EPSG:4326" ? undefined : plain;
}
