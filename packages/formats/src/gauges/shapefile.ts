import { InputError } from "@rainreckon/core";
import { openShp } from "shapefile";
import { type DbfTable, readDbf } from "./dbf.ts";
import { displayText } from "./display-text.ts";
import type { GeoJsonFeature } from "./geojson.ts";
import { readWhole } from "./whole-file.ts";

/*
 * ESRI Shapefile Technical Description, an ESRI White Paper, July 1998: the layout of the header, of records
 * and of the shapes Polygon, PolygonZ and PolygonM. Its parts are decoded by a library; before it sees them,
 * every length and count is held against the bytes there are, since it looks for the next record that seems
 * sound where one is not.
 */

const MAX_SHP_BYTES = 512 * 1024 ** 2;
const MAX_PRJ_BYTES = 64 * 1024;
const MAX_RECORDS = 1_000_000;
/** Holes are looked for in every outer ring: more work than this on one shape is refused. */
const MAX_RING_WORK = 200_000_000;
const HEADER_BYTES = 100;
const FILE_CODE = 9994;
const POLYGON_TYPES = new Set([5, 15, 25]);
const TYPE_NAMES: Readonly<Record<number, string>> = {
  1: "points",
  3: "lines",
  8: "multipoints",
  11: "points",
  13: "lines",
  18: "multipoints",
  21: "points",
  23: "lines",
  28: "multipoints",
  31: "multipatches",
};

/** The files beside a .shp, where they are there: attributes, coordinate system, encoding of the attributes. */
export interface ShapefileParts {
  readonly dbf?: string | undefined;
  readonly prj?: string | undefined;
  readonly cpg?: string | undefined;
}

export interface ShapefileFeatures {
  readonly features: readonly (GeoJsonFeature | string)[];
  readonly crs: string | undefined;
  readonly crsKnown: boolean;
}

export function isShapefile(head: Uint8Array): boolean {
  return head.length >= HEADER_BYTES && new DataView(head.buffer, head.byteOffset).getInt32(0) === FILE_CODE;
}

/**
 * Reads the polygons of a Shapefile. Rings that run clockwise are outlines, the others holes of the outline
 * that holds them.
 *
 * @param path - the .shp, at most 512 MiB
 * @throws InputError where the .shp or the .dbf is cut short, damaged or of another kind, with the number of
 * the record; where the two do not have the same number of records
 */
export async function readShapefile(path: string, parts: ShapefileParts): Promise<ShapefileFeatures> {
  const bytes = await readWhole(path, MAX_SHP_BYTES);
  const shapes = checkShp(bytes, path);
  const table = parts.dbf === undefined ? undefined : await readDbf(parts.dbf, await codePage(parts.cpg));
  if (table !== undefined && table.rows.length !== shapes) {
    throw new InputError(
      `it has ${shapes} shapes, but ${table.rows.length} rows of attributes`,
      `${path} and ${table.path}`,
      "fetch all files of the Shapefile again, they are not of one making",
    );
  }
  const features = await decode(bytes, table, path);
  const crs = parts.prj === undefined ? undefined : await wktOf(parts.prj);
  return { features, crs, crsKnown: crs !== undefined };
}

/** Holds the structure of a .shp against its bytes. @returns the number of its records */
function checkShp(bytes: Uint8Array, path: string): number {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const refuse = (what: string, where = path, fix = "fetch the file again") => {
    throw new InputError(what, where, fix);
  };
  if (bytes.length < HEADER_BYTES) refuse("the file ends within its header");
  if (view.getInt32(0) !== FILE_CODE || view.getInt32(28, true) !== 1000) refuse("this is no Shapefile");
  const said = view.getInt32(24) * 2;
  if (said !== bytes.length) refuse(`its header says ${said} bytes, and it has ${bytes.length}`);
  const type = view.getInt32(32, true);
  if (!POLYGON_TYPES.has(type)) {
    refuse(`it holds ${TYPE_NAMES[type] ?? "no shapes that are known"}, no polygons`, path, "give polygons");
  }
  let count = 0;
  let at = HEADER_BYTES;
  while (at < bytes.length) {
    count += 1;
    const where = `${path}, record ${count}`;
    if (count > MAX_RECORDS) refuse(`it has more than ${MAX_RECORDS} records`, path, "split the file");
    if (at + 12 > bytes.length) refuse("the record is cut off", where);
    if (view.getInt32(at) !== count) refuse(`it is numbered ${view.getInt32(at)}`, where);
    const length = view.getInt32(at + 4) * 2;
    const end = at + 8 + length;
    if (length < 4 || end > bytes.length)
      refuse(`its length of ${length} bytes does not fit the file`, where);
    const fault = shapeFault(view, at + 8, length, type);
    if (fault !== undefined) refuse(fault, where);
    at = end;
  }
  return count;
}

/** What is wrong with one shape; undefined where its counts fit its length and its numbers are numbers. */
function shapeFault(view: DataView, at: number, length: number, type: number): string | undefined {
  const own = view.getInt32(at, true);
  if (own === 0) return length === 4 ? undefined : "an empty shape has content";
  if (own !== type) return `its shape type is ${own} in a file of type ${type}`;
  if (length < 44) return "the shape is shorter than its own header";
  const parts = view.getInt32(at + 36, true);
  const points = view.getInt32(at + 40, true);
  const least = 44 + 4 * parts + 16 * points;
  const most = type === 5 ? least : least + 32 + 16 * points;
  if (parts < 1 || points < 1 || least > length || most < length) {
    return `its ${parts} rings of ${points} positions do not fit its ${length} bytes`;
  }
  if (parts * points > MAX_RING_WORK) return `its ${parts} rings of ${points} positions are too many`;
  let before = -1;
  for (let part = 0; part < parts; part++) {
    const first = view.getInt32(at + 44 + 4 * part, true);
    if (first <= before || first >= points || (part === 0 && first !== 0)) {
      return `its ring ${part + 1} starts at position ${first} of ${points}`;
    }
    before = first;
  }
  const positions = at + 44 + 4 * parts;
  for (let k = 0; k < 2 * points; k++) {
    if (!Number.isFinite(view.getFloat64(positions + 8 * k, true))) {
      return `its position ${(k >> 1) + 1} is no pair of numbers`;
    }
  }
  return undefined;
}

async function decode(
  bytes: Uint8Array,
  table: DbfTable | undefined,
  path: string,
): Promise<(GeoJsonFeature | string)[]> {
  const features: (GeoJsonFeature | string)[] = [];
  try {
    const source = await openShp(bytes);
    for (;;) {
      const { done, value } = await source.read();
      if (done) break;
      const row = table?.rows[features.length];
      if (row === "deleted") {
        features.push("its row of attributes is marked as deleted");
        continue;
      }
      const geometry = value as { type: string; coordinates?: unknown } | null;
      features.push({
        type: "Feature",
        properties: row ?? {},
        geometry: geometry === null ? null : { type: geometry.type, coordinates: geometry.coordinates },
      });
    }
  } catch (cause) {
    throw new InputError("the shapes cannot be decoded", path, "fetch the file again", { cause });
  }
  return features;
}

/** The well-known text of a .prj; undefined where it is empty. */
async function wktOf(path: string): Promise<string | undefined> {
  const text = new TextDecoder("utf-8").decode(await readWhole(path, MAX_PRJ_BYTES)).trim();
  if (text === "") return undefined;
  const flat = text.replace(/\s*[\r\n]+\s*/g, "");
  if (/^[A-Z_]+\s*[[(]/i.test(flat)) return flat;
  throw new InputError(
    `the text "${displayText(flat, 60)}" is no coordinate system`,
    path,
    "take the file away and write catchments.crs in the plan",
  );
}

/** The name of an encoding in a .cpg, such as "UTF-8" or "1252"; undefined where there is none. */
async function codePage(path: string | undefined): Promise<string | undefined> {
  if (path === undefined) return undefined;
  const text = new TextDecoder("utf-8").decode(await readWhole(path, MAX_PRJ_BYTES)).trim();
  return text === "" ? undefined : text.slice(0, 60);
}
