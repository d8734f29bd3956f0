import { InputError } from "@rainreckon/core";
import { readHeadBytes } from "./delimited.ts";
import { type GeoJsonFeature, readGeoJson } from "./geojson.ts";
import { isGeoPackage, readGeoPackage } from "./geopackage.ts";
import { isShapefile, readShapefile, type ShapefileParts } from "./shapefile.ts";

/** What a map file holds, whatever its format: features with properties, and the system of their positions. */
export interface MapFeatures {
  readonly format: "GeoJSON" | "Shapefile" | "GeoPackage";
  /** What each feature turned out to be: a feature, or why it is none. Numbered from 1 in messages. */
  readonly features: readonly (GeoJsonFeature | string)[];
  /** Coordinate system that the file names, a code or well-known text; undefined is longitude, latitude. */
  readonly crs: string | undefined;
  /** False where the file does not say what its coordinates are. */
  readonly crsKnown: boolean;
  /** The layer that was read, where the file has layers; all there are. */
  readonly layer?: string;
  readonly layers?: readonly string[];
}

export interface MapOptions {
  /** The files that belong to a Shapefile, where they are there. */
  readonly parts?: ShapefileParts | undefined;
  /** The layer of a GeoPackage; needed where it has several of polygons. */
  readonly layer?: string | undefined;
}

type MapReader = (path: string, options: MapOptions) => Promise<MapFeatures>;

/** A map format: how it is recognised by its first bytes, and what reads it. */
interface MapFormat {
  readonly name: MapFeatures["format"];
  recognise(head: Uint8Array): boolean;
  readonly read: MapReader;
}

const MAP_FORMATS: readonly MapFormat[] = [
  {
    name: "Shapefile",
    recognise: isShapefile,
    read: async (path, { parts = {} }) => ({ format: "Shapefile", ...(await readShapefile(path, parts)) }),
  },
  {
    name: "GeoPackage",
    recognise: isGeoPackage,
    read: async (path, { layer }) => ({ format: "GeoPackage", ...(await readGeoPackage(path, layer)) }),
  },
  {
    name: "GeoJSON",
    recognise: (head) => {
      const text = new TextDecoder("utf-8").decode(head);
      return /^\s*\{/.test(text) && /"type"\s*:\s*"(FeatureCollection|Feature)"/.test(text);
    },
    read: async (path) => ({ format: "GeoJSON", crsKnown: true, ...(await readGeoJson(path)) }),
  },
];

/**
 * The format of a map file by its first 64 KiB; undefined where it is none that is read.
 *
 * @throws InputError where it cannot be opened
 */
export async function mapFormatOf(path: string): Promise<MapFeatures["format"] | undefined> {
  const head = await readHeadBytes(path);
  return MAP_FORMATS.find((format) => format.recognise(head))?.name;
}

/**
 * Reads the features of a map file in any of the formats.
 *
 * @throws InputError where it cannot be read at all
 */
export async function readMapFeatures(path: string, options: MapOptions): Promise<MapFeatures> {
  const head = await readHeadBytes(path);
  if (head.length === 0) throw new InputError("the file is empty", path, "fetch it again");
  // What is none of them may be GeoJSON that starts oddly: its reader says what is wrong, and where.
  const format = MAP_FORMATS.find((one) => one.recognise(head)) ?? MAP_FORMATS[MAP_FORMATS.length - 1];
  return format.read(path, options);
}
