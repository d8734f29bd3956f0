import { createRequire } from "node:module";
import { InputError } from "@rainreckon/core";
import proj4 from "proj4";
import { codesOfName, type WktFacts, wktFacts } from "./wkt-name.ts";

const require = createRequire(import.meta.url);

/** A map projection: WGS 84 longitude and latitude to metres on the map and back. Built once, used often. */
export interface Projection {
  /** As it was asked for: an authority code, a PROJ string, or well-known text. */
  readonly crs: string;
  /** The PROJ string behind it; well-known text where no code stands for it. */
  readonly projString: string;
  /** True where coordinates are longitude and latitude in degrees, not metres. */
  readonly geographic: boolean;
  /** @returns map coordinates, metres (degrees where geographic); NaN where the projection has no answer */
  forward(lonDeg: number, latDeg: number): readonly [xM: number, yM: number];
  /** @returns WGS 84 longitude and latitude, degrees */
  inverse(xM: number, yM: number): readonly [lonDeg: number, latDeg: number];
}

/** The entry of the EPSG register behind a code, or undefined where the register here does not hold it. */
function epsgEntry(code: string): { proj4: string; bbox?: [number, number, number, number] } | undefined {
  if (!/^\d{1,6}$/.test(code)) return undefined;
  try {
    return require(`epsg-index/s/${code}.json`);
  } catch {
    return undefined;
  }
}

/**
 * The PROJ string of a coordinate system named by authority code ("EPSG:3035", "urn:ogc:def:crs:EPSG::3035",
 * "OGC:CRS84") or given as a PROJ string already.
 *
 * @throws InputError (usage) where the code is not known, or the datum needs a shift grid: without the
 *   grid a position may be off by a hundred metres or more, and that must not happen quietly
 */
export function projStringOf(crs: string): string {
  const name = crs.trim();
  if (/^(urn:ogc:def:crs:)?OGC:(1\.3|2)?:?:?CRS84$/i.test(name)) return "+proj=longlat +datum=WGS84 +no_defs";
  const code = /^(?:urn:ogc:def:crs:)?EPSG:(?:[\d.]*:)?(\d+)$/i.exec(name)?.[1];
  let projString = name;
  if (code !== undefined) {
    const entry = epsgEntry(code);
    if (entry === undefined) {
      throw new InputError(
        `coordinate system EPSG:${code} is not in the register this program carries`,
        `crs "${name}"`,
        "give its PROJ string (+proj=…) instead",
        { kind: "usage" },
      );
    }
    projString = entry.proj4.replace(/\s*\+type=crs/, "");
  } else if (!/^\+proj=/.test(name)) {
    throw new InputError(
      "a coordinate system that is neither an EPSG code nor a PROJ string",
      `crs "${name}"`,
      'write it like "EPSG:3035" or "+proj=laea +lat_0=52 +lon_0=10 +ellps=GRS80 +units=m"',
      { kind: "usage" },
    );
  }
  const shiftGrid = /\+nadgrids=(\S+)/.exec(projString)?.[1];
  if (shiftGrid !== undefined && shiftGrid !== "@null") {
    throw new InputError(
      `this coordinate system needs the datum shift grid ${shiftGrid}, which is not carried here`,
      `crs "${name}"`,
      "convert the file to WGS 84 (EPSG:4326) or ETRS89 with a tool that has the grid",
      { kind: "usage" },
    );
  }
  return projString;
}

/**
 * A PROJ string with the false origin that PROJ takes where none is named, 0 and 0 (PROJ manual, cartographic
 * projections): some projections of the library give NaN without it.
 */
function withOrigin(projString: string): string {
  const missing = ["x_0", "y_0"].filter((name) => !new RegExp(`\\+${name}=`).test(projString));
  return [projString, ...missing.map((name) => `+${name}=0`)].join(" ");
}

/**
 * A projection between WGS 84 and a named coordinate system.
 *
 * Well-known text is taken by the EPSG code that it states, else by the code whose name and projection it
 * has, else by its own parameters where it is known how its datum lies to WGS 84.
 *
 * Positions agree with PROJ to better than 1 mm for the projections tested here (see projection.test.ts).
 *
 * @throws InputError (usage) for an unknown system, a datum that needs a shift grid, or well-known text
 *   whose datum is not known here
 */
export function projection(crs: string): Projection {
  const wkt = wktFacts(crs);
  const projString = wkt === undefined ? projStringOf(crs) : definitionOfWkt(crs.trim(), wkt);
  let converter: { forward(p: [number, number]): number[]; inverse(p: [number, number]): number[] };
  try {
    converter = proj4("+proj=longlat +datum=WGS84 +no_defs", withOrigin(projString));
  } catch (cause) {
    throw new InputError(
      "a coordinate system that cannot be built",
      `crs "${wkt?.name ?? crs}"`,
      "check its PROJ string, or write its EPSG code",
      {
        kind: "usage",
        cause,
      },
    );
  }
  const geographic = wkt?.geographic ?? /\+proj=(longlat|latlong)\b/.test(projString);
  return {
    crs,
    projString,
    geographic,
    forward(lonDeg, latDeg) {
      const [x, y] = converter.forward([lonDeg, latDeg]);
      return [x, y];
    },
    inverse(xM, yM) {
      const [lonDeg, latDeg] = converter.inverse([xM, yM]);
      return [lonDeg, latDeg];
    },
  };
}

/** Systems of one name are taken for the same where they put a place no further apart than their datums may. */
const SAME_SYSTEM_M = 500;
const METRES_PER_DEGREE = 111_320;

/** The PROJ string of the EPSG code that stands for well-known text; the text itself where none does. */
function definitionOfWkt(text: string, facts: WktFacts): string {
  if (facts.epsg !== undefined && epsgEntry(facts.epsg) !== undefined)
    return projStringOf(`EPSG:${facts.epsg}`);
  const same = codesOfName(facts.name).filter((code) => putsPlacesAlike(text, code));
  if (same.length === 1) return projStringOf(`EPSG:${same[0]}`);
  if (facts.datumKnown) return text;
  throw new InputError(
    `it is not known how the datum "${facts.datum}" of this coordinate system lies to WGS 84`,
    `crs "${facts.name}"`,
    "write its EPSG code as crs in the plan, or a PROJ string with +towgs84",
    { kind: "usage" },
  );
}

/** Whether a code of the register stands for the same projection: the datum aside, places come out alike. */
function putsPlacesAlike(text: string, code: string): boolean {
  const registered = epsgEntry(code)?.proj4.replace(/\s*\+(type|nadgrids)=\S+/g, "");
  if (registered === undefined) return false;
  try {
    const own = proj4(text);
    const other = proj4(registered);
    const centre = centreOf(code);
    const [x, y] = other.forward([centre.lonDeg, centre.latDeg]);
    const [lonDeg, latDeg] = own.inverse([x, y]);
    const eastM = (lonDeg - centre.lonDeg) * METRES_PER_DEGREE * Math.cos((centre.latDeg * Math.PI) / 180);
    const northM = (latDeg - centre.latDeg) * METRES_PER_DEGREE;
    return Math.hypot(eastM, northM) < SAME_SYSTEM_M;
  } catch {
    // A method that the projection library does not have: its own message follows if the text is used.
    return false;
  }
}

/** The middle of the area that a code is made for. */
function centreOf(code: string): { readonly lonDeg: number; readonly latDeg: number } {
  const [north, west, south, east] = epsgEntry(code)?.bbox ?? [0, 0, 0, 0];
  return { lonDeg: west <= east ? (west + east) / 2 : west, latDeg: (north + south) / 2 };
}
