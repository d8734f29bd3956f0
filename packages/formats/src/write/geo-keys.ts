import { InputError } from "@rainreckon/core";
import { epsgCodeOf } from "./map-reference.ts";
import { isOneParallel, isPolar } from "./method.ts";
import { type Projection, parseProjection } from "./projection.ts";

/** The three GeoTIFF tags that name a coordinate system. */
export interface GeoKeyTags {
  /** Header and entries, four numbers each, ascending by key. */
  readonly directory: Uint16Array;
  readonly doubles: Float64Array;
  /** Texts, each closed by "|". */
  readonly ascii: string;
}

/** Numbers with an integer value go into the directory; the others are marked. */
type KeyValue = number | string | { readonly doubles: readonly number[] };

const USER_DEFINED = 32767;
const double = (...doubles: number[]): KeyValue => ({ doubles });

/**
 * GeoTIFF keys of a projected system in metres: its EPSG code where it has one, else every parameter.
 *
 * @param crs - an authority code such as "EPSG:3035", or a PROJ string
 * @param projString - the same system as a PROJ string
 * @throws InputError of kind "usage" for a system that is not in metres, and for a projection without a
 *   code that GeoTIFF cannot describe
 * @remarks OGC GeoTIFF Standard 1.1 (OGC 19-008r4, 2019), annexes; key numbers from memory, held against
 *   GDAL in tests. GeogTOWGS84GeoKey (2062) is a widely read extension of it.
 */
export function geoKeys(crs: string, projString: string): GeoKeyTags {
  const projection = parseProjection(projString);
  const keys = new Map<number, KeyValue>([
    [1024, 1], // GTModelType: projected
    [1025, 1], // GTRasterType: a pixel is an area
    [3076, 9001], // ProjLinearUnits: metre
  ]);
  const code = epsgCodeOf(crs);
  if (code !== undefined) {
    keys.set(3072, code);
  } else {
    keys.set(1026, `${projection.method} in metres`);
    keys.set(3072, USER_DEFINED);
    keys.set(3074, USER_DEFINED);
    addGeographicKeys(keys, projection);
    addMethodKeys(keys, projection, crs);
  }
  return encoded(keys);
}

function addGeographicKeys(keys: Map<number, KeyValue>, projection: Projection): void {
  const { ellipsoid, geographicEpsg, towgs84 } = projection;
  if (geographicEpsg !== undefined) {
    keys.set(2048, geographicEpsg);
    return;
  }
  keys.set(2048, USER_DEFINED);
  keys.set(2050, USER_DEFINED);
  keys.set(2051, 8901); // Greenwich
  keys.set(2054, 9102); // degree
  keys.set(2056, ellipsoid.epsg ?? USER_DEFINED);
  keys.set(2057, double(ellipsoid.semiMajorM));
  if (ellipsoid.inverseFlattening === 0) keys.set(2058, double(ellipsoid.semiMajorM));
  else keys.set(2059, double(ellipsoid.inverseFlattening));
  if (towgs84 !== undefined) keys.set(2062, double(...towgs84));
}

/** ProjCoordTrans code of a method, and its parameters by key. */
interface MethodKeys {
  readonly code: number;
  readonly parameters: Readonly<Record<number, number | undefined>>;
}

function addMethodKeys(keys: Map<number, KeyValue>, projection: Projection, crs: string): void {
  const method = methodKeys(projection);
  if (method === undefined) {
    throw new InputError(
      `GeoTIFF has no words for the projection ${projection.method} as it stands here`,
      crs,
      "give its EPSG code, or choose laea, aea, aeqd, lcc, stere, sterea, tmerc or utm",
      { kind: "usage" },
    );
  }
  keys.set(3075, method.code);
  for (const [key, value] of Object.entries(method.parameters)) {
    if (value !== undefined) keys.set(Number(key), double(value));
  }
}

function methodKeys(projection: Projection): MethodKeys | undefined {
  const { latitudeOfOriginDeg, longitudeOfOriginDeg, scale, trueScaleDeg } = projection;
  const offsets = { 3082: projection.falseEastingM, 3083: projection.falseNorthingM };
  const centre = { 3088: longitudeOfOriginDeg, 3089: latitudeOfOriginDeg };
  const origin = { 3080: longitudeOfOriginDeg, 3081: latitudeOfOriginDeg };
  const parallels = {
    3078: projection.parallel1Deg,
    3079: projection.parallel2Deg ?? projection.parallel1Deg,
  };
  switch (projection.method) {
    case "tmerc":
      return { code: 1, parameters: { ...origin, 3092: scale, ...offsets } };
    case "laea":
      return { code: 10, parameters: { ...centre, ...offsets } };
    case "aea":
      return { code: 11, parameters: { ...parallels, ...origin, ...offsets } };
    case "aeqd":
      return { code: 12, parameters: { ...centre, ...offsets } };
    case "sterea":
      return { code: 16, parameters: { ...origin, 3092: scale, ...offsets } };
    case "stere": {
      if (!isPolar(projection)) return { code: 14, parameters: { ...centre, 3092: scale, ...offsets } };
      const parallel = trueScaleDeg ?? latitudeOfOriginDeg;
      const poleScale = trueScaleDeg === undefined ? scale : 1;
      return {
        code: 15,
        parameters: { 3081: parallel, 3095: longitudeOfOriginDeg, 3092: poleScale, ...offsets },
      };
    }
    case "lcc":
      if (isOneParallel(projection)) {
        return { code: 9, parameters: { ...origin, 3092: scale, ...offsets } };
      }
      // The cone with two parallels has no key for a scale.
      if (scale !== 1) return undefined;
      return {
        code: 8,
        parameters: {
          ...parallels,
          3084: longitudeOfOriginDeg,
          3085: latitudeOfOriginDeg,
          3086: projection.falseEastingM,
          3087: projection.falseNorthingM,
        },
      };
    default:
      return undefined;
  }
}

function encoded(keys: ReadonlyMap<number, KeyValue>): GeoKeyTags {
  const entries: number[] = [];
  const doubles: number[] = [];
  let ascii = "";
  for (const [key, value] of [...keys].sort(([a], [b]) => a - b)) {
    if (typeof value === "number") {
      entries.push(key, 0, 1, value);
    } else if (typeof value === "string") {
      entries.push(key, 34737, value.length + 1, ascii.length);
      ascii += `${value}|`;
    } else {
      entries.push(key, 34736, value.doubles.length, doubles.length);
      doubles.push(...value.doubles);
    }
  }
  // Version 1, revision 1.0: the one that every reader knows.
  const directory = Uint16Array.from([1, 1, 0, keys.size, ...entries]);
  return { directory, doubles: Float64Array.from(doubles), ascii };
}
