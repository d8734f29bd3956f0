import { InputError } from "@rainreckon/core";
import { ELLIPSOIDS, type Ellipsoid, inverseFlatteningOf } from "./ellipsoid.ts";

/** What a PROJ string says of a projected system in metres. Angles in degrees, lengths in metres. */
export interface Projection {
  /** Method by its PROJ name; "utm" is read as the "tmerc" that it stands for. */
  readonly method: string;
  readonly latitudeOfOriginDeg: number;
  readonly longitudeOfOriginDeg: number;
  readonly falseEastingM: number;
  readonly falseNorthingM: number;
  readonly scale: number;
  /** First and second standard parallel, and the latitude of true scale, where given. */
  readonly parallel1Deg?: number;
  readonly parallel2Deg?: number;
  readonly trueScaleDeg?: number;
  readonly ellipsoid: Ellipsoid;
  /** EPSG code of the geographic system, where the string names a datum. */
  readonly geographicEpsg?: number;
  /** Shift to WGS 84: 3 or 7 numbers (m, arc seconds, ppm), where the string gives one. */
  readonly towgs84?: readonly number[];
}

/** Datums whose shift to WGS 84 is nil, so that the name loses nothing. Codes: EPSG (from memory). */
const DATUMS: Readonly<Record<string, { ellipsoid: string; geographicEpsg: number }>> = {
  WGS84: { ellipsoid: "WGS84", geographicEpsg: 4326 },
  NAD83: { ellipsoid: "GRS80", geographicEpsg: 4269 },
};

/**
 * Read a PROJ string of a projected system in metres.
 *
 * Only what the string says is used: an ellipsoid is never assumed.
 *
 * @param projString - such as "+proj=laea +lat_0=51 +lon_0=4 +ellps=GRS80 +units=m"
 * @throws InputError of kind "usage" when it is not such a string: geographic, not in metres, axes turned,
 *   another prime meridian than Greenwich, no ellipsoid, a datum whose shift it does not give
 * @remarks Parameters as in the PROJ documentation, "Cartographic projection" (from memory).
 */
export function parseProjection(projString: string): Projection {
  const words = wordsOf(projString);
  const fault = (what: string, fix: string) => new InputError(what, projString, fix, { kind: "usage" });
  const number = (key: string): number | undefined => {
    const word = words.get(key);
    if (word === undefined) return undefined;
    const value = Number(word);
    if (word === "" || !Number.isFinite(value)) {
      throw fault(`+${key}=${word} is not a number`, "write it in decimals");
    }
    return value;
  };

  const method = words.get("proj") ?? "";
  if (method === "")
    throw fault("the coordinate system names no projection", "give a PROJ string with +proj=");
  if (["longlat", "latlong", "lonlat", "latlon", "geocent"].includes(method)) {
    throw fault("the grid needs a projected coordinate system", "choose one in metres, such as +proj=laea");
  }
  if ((words.get("units") ?? "m") !== "m" || (number("to_meter") ?? 1) !== 1) {
    throw fault("the coordinate system is not in metres", "choose one with +units=m");
  }
  if (!["0", "greenwich"].includes(words.get("pm") ?? "0") || (words.get("axis") ?? "enu") !== "enu") {
    throw fault(
      "the coordinate system has another prime meridian or turned axes",
      "choose one counted from Greenwich, x to the east and y to the north",
    );
  }

  const datumName = words.get("datum");
  const datum = datumName === undefined ? undefined : DATUMS[datumName];
  if (datumName !== undefined && datum === undefined) {
    throw fault(
      `the shift of datum ${datumName} is not in the string`,
      "write it out as +ellps= and +towgs84=",
    );
  }
  const ellipsoid = datum ? ELLIPSOIDS[datum.ellipsoid] : ellipsoidOf(words, number);
  if (ellipsoid === undefined) {
    throw fault("the coordinate system names no ellipsoid that we know", "add +ellps=GRS80, or +a= and +rf=");
  }

  const parallel1Deg = number("lat_1");
  // PROJ puts the origin of a conformal cone with one parallel on that parallel.
  const coneOriginDeg = method === "lcc" && !words.has("lat_2") ? parallel1Deg : undefined;
  const common = {
    ellipsoid,
    falseEastingM: number("x_0") ?? 0,
    falseNorthingM: number("y_0") ?? 0,
    latitudeOfOriginDeg: number("lat_0") ?? coneOriginDeg ?? 0,
    longitudeOfOriginDeg: number("lon_0") ?? 0,
    scale: number("k_0") ?? number("k") ?? 1,
    ...optional("parallel1Deg", parallel1Deg),
    ...optional("parallel2Deg", number("lat_2")),
    ...optional("trueScaleDeg", number("lat_ts")),
    ...optional("geographicEpsg", datum?.geographicEpsg),
    ...optional("towgs84", shiftOf(words.get("towgs84"), fault)),
  };
  if (method !== "utm") return { method, ...common };

  const zone = number("zone") ?? Number.NaN;
  if (!(Number.isInteger(zone) && zone >= 1 && zone <= 60)) {
    throw fault("+proj=utm needs a zone from 1 to 60", "add +zone=");
  }
  // Transverse Mercator as UTM defines it: NGA.SIG.0012 (2014), from memory.
  return {
    ...common,
    method: "tmerc",
    latitudeOfOriginDeg: 0,
    longitudeOfOriginDeg: 6 * zone - 183,
    falseEastingM: 500_000,
    falseNorthingM: words.has("south") ? 10_000_000 : 0,
    scale: 0.9996,
  };
}

function wordsOf(projString: string): ReadonlyMap<string, string> {
  const words = new Map<string, string>();
  for (const word of projString.trim().split(/\s+/)) {
    const [key, ...rest] = word.replace(/^\+/, "").split("=");
    // PROJ keeps the first of two equal keys.
    if (!words.has(key)) words.set(key, rest.join("="));
  }
  return words;
}

function ellipsoidOf(
  words: ReadonlyMap<string, string>,
  number: (key: string) => number | undefined,
): Ellipsoid | undefined {
  const radiusM = number("R");
  if (radiusM !== undefined) return { semiMajorM: radiusM, inverseFlattening: 0 };
  const semiMajorM = number("a");
  if (semiMajorM === undefined) return ELLIPSOIDS[words.get("ellps") ?? ""];
  const semiMinorM = number("b");
  if (semiMinorM !== undefined) {
    return { semiMajorM, inverseFlattening: inverseFlatteningOf(semiMajorM, semiMinorM) };
  }
  const inverseFlattening = number("rf");
  return inverseFlattening === undefined ? undefined : { semiMajorM, inverseFlattening };
}

function shiftOf(
  text: string | undefined,
  fault: (what: string, fix: string) => InputError,
): readonly number[] | undefined {
  if (text === undefined) return undefined;
  const shift = text.split(",").map(Number);
  if (!((shift.length === 3 || shift.length === 7) && shift.every(Number.isFinite))) {
    throw fault(`+towgs84=${text} is not a shift`, "give 3 or 7 numbers with commas between");
  }
  return shift;
}

function optional<K extends string, V>(key: K, value: V | undefined): { [key in K]?: V } {
  return value === undefined ? {} : ({ [key]: value } as { [key in K]?: V });
}
