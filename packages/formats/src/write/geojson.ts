import { type JsonValue, toJsonLine } from "./json.ts";
import { writeText } from "./text.ts";

/** Longitude and latitude, degrees, WGS 84. */
export type LonLat = readonly [lonDeg: number, latDeg: number];

/** A geometry of RFC 7946; coordinates are longitude first. */
export type GeoJsonGeometry =
  | { readonly type: "Point"; readonly coordinates: LonLat }
  | { readonly type: "LineString" | "MultiPoint"; readonly coordinates: readonly LonLat[] }
  | { readonly type: "MultiLineString" | "Polygon"; readonly coordinates: readonly (readonly LonLat[])[] }
  | {
      readonly type: "MultiPolygon";
      readonly coordinates: readonly (readonly (readonly LonLat[])[])[];
    };

export interface GeoJsonFeature {
  readonly id?: string;
  readonly geometry: GeoJsonGeometry;
  readonly properties: Readonly<Record<string, JsonValue>>;
}

/** The lines of one depth. */
export interface Isohyet {
  readonly depthMm: number;
  /** Each line is its positions in order; a closed line ends where it began. */
  readonly lines: readonly (readonly LonLat[])[];
}

/**
 * Write features as GeoJSON (a FeatureCollection, WGS 84, one feature a line) to exactly this path.
 *
 * Coordinates are rounded to 6 decimals, about 0.1 m. On failure the file is left incomplete.
 *
 * @param path - where to write
 * @param features - in the order they are written
 * @param about - what stands beside the features: title, cautions, times; keys must not be "type" or "features"
 * @throws InputError when the file cannot be written; RangeError for a position that is not on Earth
 *   (longitude −180 to 180, latitude −90 to 90) and for values that JSON cannot hold
 * @remarks RFC 7946 (Butler et al., 2016); foreign members are its section 6.1.
 */
export async function writeGeoJson(
  path: string,
  features: Iterable<GeoJsonFeature>,
  about: Readonly<Record<string, JsonValue>> = {},
): Promise<void> {
  for (const key of ["type", "features"]) {
    if (key in about) throw new RangeError(`"${key}" belongs to GeoJSON itself`);
  }
  await writeText(path, collectionText(features, about));
}

/**
 * Write lines of equal depth as GeoJSON: one feature per depth, a MultiLineString with `depth_mm`.
 *
 * A line that crosses the 180° meridian is cut there. A line that rounding leaves with a single
 * position is left out; so is a depth without any line.
 *
 * @param isohyets - in the order they are written
 * @returns how many lines were too short to be drawn
 * @throws as {@link writeGeoJson}
 */
export async function writeIsohyets(
  path: string,
  isohyets: readonly Isohyet[],
  about: Readonly<Record<string, JsonValue>> = {},
): Promise<{ readonly linesTooShort: number }> {
  let linesTooShort = 0;
  const features: GeoJsonFeature[] = [];
  for (const { depthMm, lines } of isohyets) {
    const coordinates = lines.flatMap((line) => {
      const drawn = cutAtDateLine(line).map(withoutRepeats).filter(hasTwoPositions);
      if (drawn.length === 0) linesTooShort++;
      return drawn;
    });
    if (coordinates.length === 0) continue;
    features.push({
      geometry: { type: "MultiLineString", coordinates },
      properties: { depth_mm: depthMm },
    });
  }
  await writeGeoJson(path, features, about);
  return { linesTooShort };
}

function* collectionText(
  features: Iterable<GeoJsonFeature>,
  about: Readonly<Record<string, JsonValue>>,
): Generator<string> {
  yield '{\n"type": "FeatureCollection",\n';
  for (const key of Object.keys(about).sort()) {
    yield `${JSON.stringify(key)}: ${toJsonLine(about[key])},\n`;
  }
  yield '"features": [';
  let separator = "\n";
  for (const { id, geometry, properties } of features) {
    const feature = {
      type: "Feature",
      ...(id === undefined ? {} : { id }),
      geometry: { type: geometry.type, coordinates: roundedCoordinates(geometry.coordinates) },
      properties,
    };
    yield `${separator}${toJsonLine(feature)}`;
    separator = ",\n";
  }
  yield "\n]\n}\n";
}

type Coordinates = LonLat | readonly Coordinates[];

function roundedCoordinates(coordinates: Coordinates): JsonValue {
  if (isPosition(coordinates)) return roundedPosition(coordinates);
  return coordinates.map(roundedCoordinates);
}

function isPosition(coordinates: Coordinates): coordinates is LonLat {
  return typeof coordinates[0] === "number";
}

function roundedPosition([lonDeg, latDeg]: LonLat): LonLat {
  if (!(Math.abs(lonDeg) <= 180 && Math.abs(latDeg) <= 90)) {
    throw new RangeError(`no such place on Earth: longitude ${lonDeg}, latitude ${latDeg}`);
  }
  return [rounded(lonDeg), rounded(latDeg)];
}

/** Six decimals; adding 0 turns -0 into 0. */
function rounded(degrees: number): number {
  return Math.round(degrees * 1e6) / 1e6 + 0;
}

function withoutRepeats(line: readonly LonLat[]): readonly LonLat[] {
  const positions: LonLat[] = [];
  for (const position of line.map(roundedPosition)) {
    const last = positions.at(-1);
    if (last?.[0] !== position[0] || last[1] !== position[1]) positions.push(position);
  }
  return positions;
}

function hasTwoPositions(line: readonly LonLat[]): boolean {
  return line.length > 1;
}

/** Cut a line wherever it jumps across the 180° meridian (RFC 7946, section 3.1.9). */
function cutAtDateLine(line: readonly LonLat[]): readonly (readonly LonLat[])[] {
  const parts: LonLat[][] = [[]];
  let last: LonLat | undefined;
  for (const position of line) {
    if (last !== undefined && Math.abs(position[0] - last[0]) > 180) {
      const side = last[0] > 0 ? 180 : -180;
      const stepDeg = position[0] + 2 * side - last[0];
      const share = stepDeg === 0 ? 0 : (side - last[0]) / stepDeg;
      const latDeg = last[1] + share * (position[1] - last[1]);
      parts.at(-1)!.push([side, latDeg]);
      parts.push([[-side, latDeg]]);
    }
    parts.at(-1)!.push(position);
    last = position;
  }
  return parts;
}
