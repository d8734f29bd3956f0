import { createRequire } from "node:module";
import { InputError } from "@rainreckon/core";
import proj4 from "proj4";

const require = createRequire(import.meta.url);

/** A map projection: WGS 84 longitude and latitude to metres on the map and back. Built once, used often. */
export interface Projection {
  /** As it was asked for: an authority code or a PROJ string. */
  readonly crs: string;
  /** The PROJ string behind it. */
  readonly projString: string;
  /** True where coordinates are longitude and latitude in degrees, not metres. */
  readonly geographic: boolean;
  /** @returns map coordinates, metres (degrees where geographic); NaN where the projection has no answer */
  forward(lonDeg: number, latDeg: number): readonly [xM: number, yM: number];
  /** @returns WGS 84 longitude and latitude, degrees */
  inverse(xM: number, yM: number): readonly [lonDeg: number, latDeg: number];
}

/** The entry of the EPSG register behind a code, or undefined where the register here does not hold it. */
function epsgEntry(code: string): { proj4: string } | undefined {
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
 * Positions agree with PROJ to better than 1 mm for the projections tested here (see projection.test.ts).
 *
 * @throws InputError (usage) for an unknown system, or one whose unit is not the metre
 */
export function projection(crs: string): Projection {
  const projString = projStringOf(crs);
  let converter: { forward(p: [number, number]): number[]; inverse(p: [number, number]): number[] };
  try {
    converter = proj4("+proj=longlat +datum=WGS84 +no_defs", withOrigin(projString));
  } catch (cause) {
    throw new InputError(
      "a coordinate system that cannot be built",
      `crs "${crs}"`,
      "check its PROJ string",
      {
        kind: "usage",
        cause,
      },
    );
  }
  const geographic = /\+proj=(longlat|latlong)\b/.test(projString);
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
