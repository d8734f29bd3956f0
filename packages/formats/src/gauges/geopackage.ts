import { InputError } from "@rainreckon/core";
import initSqlJs, { type Database, type SqlJsStatic, type SqlValue } from "sql.js";
import { displayText } from "./display-text.ts";
import type { GeoJsonFeature } from "./geojson.ts";
import { readWhole } from "./whole-file.ts";
import { readWkb, WkbFault } from "./wkb.ts";

/*
 * OGC GeoPackage Encoding Standard (OGC 12-128r19): tables gpkg_contents, gpkg_geometry_columns and
 * gpkg_spatial_ref_sys, and the header before each geometry (clause 2.1.3). Read through SQLite compiled to
 * WebAssembly, from memory: nothing but the file handed in is ever opened.
 */

const MAGIC = "SQLite format 3\0";
const MAX_BYTES = 256 * 1024 ** 2;
const MAX_FEATURES = 1_000_000;
/** Bytes 18 and 19 of the file are 2 where changes may lie in a write-ahead log beside it. */
const WRITE_AHEAD_LOG = 2;
/** Sizes of the envelope by the indicator in the header of a geometry. */
const ENVELOPE_BYTES = [0, 32, 48, 48, 64];

let library: Promise<SqlJsStatic> | undefined;

export interface GeoPackageFeatures {
  readonly features: readonly (GeoJsonFeature | string)[];
  readonly crs: string | undefined;
  readonly crsKnown: boolean;
  readonly layer: string;
  readonly layers: readonly string[];
}

interface Layer {
  readonly table: string;
  readonly geometryColumn: string;
  readonly srsId: number;
}

export function isGeoPackage(head: Uint8Array): boolean {
  return new TextDecoder("windows-1252").decode(head.subarray(0, MAGIC.length)) === MAGIC;
}

/**
 * Reads one layer of polygons of a GeoPackage.
 *
 * @param wanted - the layer; it may be left out where there is one only
 * @throws InputError where the file is damaged, holds no layer of polygons, or several and none is named
 */
export function readGeoPackage(path: string, wanted: string | undefined): Promise<GeoPackageFeatures> {
  return withDatabase(path, (database) => readLayer(database, wanted, path));
}

/** Names of the layers that may hold polygons. @throws InputError as {@link readGeoPackage} */
export function geoPackageLayers(path: string): Promise<readonly string[]> {
  return withDatabase(path, (database) => checkedLayers(database, path).map(({ table }) => table));
}

async function withDatabase<T>(path: string, use: (database: Database) => T): Promise<T> {
  const bytes = await readWhole(path, MAX_BYTES);
  if (bytes.length < 100 || !isGeoPackage(bytes)) {
    throw new InputError("this is no GeoPackage", path, "fetch the file again");
  }
  if (bytes[18] === WRITE_AHEAD_LOG || bytes[19] === WRITE_AHEAD_LOG) {
    throw new InputError(
      "the file is in use with a write-ahead log, and may lack its newest changes",
      path,
      "close the program that holds it open, or export the layer again",
    );
  }
  library ??= initSqlJs();
  const { Database } = await library;
  let database: Database | undefined;
  try {
    database = new Database(bytes);
    return use(database);
  } catch (cause) {
    if (cause instanceof InputError) throw cause;
    // After a trap nothing in the library's memory can be trusted: the next file gets a library of its own.
    if (cause instanceof Error && cause.name === "RuntimeError") {
      library = undefined;
      database = undefined;
    }
    const said = cause instanceof Error ? cause.message : String(cause);
    throw new InputError(
      `the file is damaged: ${displayText(said, 120)}`,
      path,
      "fetch it again, or export the layer again",
      { cause },
    );
  } finally {
    database?.close();
  }
}

/** The layers of a file that was found to be whole. */
function checkedLayers(database: Database, path: string): Layer[] {
  const intact = rowsOf(database, "PRAGMA integrity_check(1)")[0]?.[0];
  if (intact !== "ok") {
    throw new InputError(
      `the file is damaged: ${displayText(intact, 120)}`,
      path,
      "fetch it again, or export the layer again",
    );
  }
  for (const table of ["gpkg_contents", "gpkg_geometry_columns", "gpkg_spatial_ref_sys"]) {
    if (!isTable(database, table)) {
      throw new InputError(`it has no table ${table}: this is no GeoPackage`, path, "export the layer again");
    }
  }
  const layers = layersOf(database);
  if (layers.length === 0) {
    throw new InputError("it holds no layer that may have polygons", path, "give a layer of polygons");
  }
  return layers;
}

function readLayer(database: Database, wanted: string | undefined, path: string): GeoPackageFeatures {
  const layers = checkedLayers(database, path);
  const names = layers.map(({ table }) => table);
  const list = names.map((name) => `"${displayText(name, 60)}"`).join(", ");
  if (wanted === undefined && layers.length > 1) {
    throw new InputError("it holds several layers of polygons", path, `write layer: one of ${list}`);
  }
  const layer = wanted === undefined ? layers[0] : layers.find(({ table }) => table === wanted);
  if (layer === undefined) {
    throw new InputError(`it has no layer "${displayText(wanted, 60)}"`, path, `name one of ${list}`);
  }
  const { crs, known } = systemOf(database, layer.srsId);
  return {
    features: featuresOf(database, layer, path),
    crs,
    crsKnown: known,
    layer: layer.table,
    layers: names,
  };
}

/** Layers whose table is a plain one: a view or virtual table could do anything at all. */
function layersOf(database: Database): Layer[] {
  const rows = rowsOf(
    database,
    `SELECT g.table_name, g.column_name, g.srs_id FROM gpkg_geometry_columns AS g
     JOIN gpkg_contents AS c ON c.table_name = g.table_name
     WHERE c.data_type = 'features'
       AND upper(g.geometry_type_name) IN ('POLYGON', 'MULTIPOLYGON', 'GEOMETRY', 'GEOMETRYCOLLECTION')
     ORDER BY g.table_name LIMIT 1000`,
  );
  return rows
    .map(([table, column, srsId]) => ({
      table: String(table),
      geometryColumn: String(column),
      srsId: Number(srsId),
    }))
    .filter(({ table }) => isTable(database, table));
}

function isTable(database: Database, name: string): boolean {
  const [row] = rowsOf(database, "SELECT type, sql FROM sqlite_master WHERE name = ?", [name]);
  return row !== undefined && row[0] === "table" && !/^\s*CREATE\s+VIRTUAL/i.test(String(row[1]));
}

/** EPSG:4326 is longitude, latitude in a GeoPackage; -1 and 0 are systems that nobody named. */
function systemOf(database: Database, srsId: number): { crs: string | undefined; known: boolean } {
  const [row] = rowsOf(
    database,
    "SELECT organization, organization_coordsys_id, definition FROM gpkg_spatial_ref_sys WHERE srs_id = ?",
    [srsId],
  );
  if (row === undefined || srsId === 0 || srsId === -1) return { crs: undefined, known: false };
  const [organization, code, definition] = row;
  if (String(organization).toUpperCase() === "EPSG") {
    return Number(code) === 4326 ? { crs: undefined, known: true } : { crs: `EPSG:${code}`, known: true };
  }
  const wkt = String(definition ?? "").trim();
  return /^[A-Z_]+\s*\[/i.test(wkt) ? { crs: wkt, known: true } : { crs: undefined, known: false };
}

function featuresOf(database: Database, layer: Layer, path: string): (GeoJsonFeature | string)[] {
  const table = quoted(layer.table);
  // Whole numbers as text: an id of many digits keeps all of them.
  const columns = rowsOf(database, `PRAGMA table_info(${table})`).map((row) => String(row[1]));
  const others = columns.filter((column) => column !== layer.geometryColumn);
  if (others.length === columns.length) {
    throw new InputError(
      `the layer has no column "${displayText(layer.geometryColumn, 60)}"`,
      path,
      "export it again",
    );
  }
  const picked = others.map((column) => {
    const name = quoted(column);
    return `CASE typeof(${name}) WHEN 'integer' THEN CAST(${name} AS TEXT) WHEN 'blob' THEN NULL ELSE ${name} END`;
  });
  const statement = database.prepare(
    `SELECT ${[quoted(layer.geometryColumn), ...picked].join(", ")} FROM ${table} ORDER BY rowid`,
  );
  const features: (GeoJsonFeature | string)[] = [];
  try {
    while (statement.step()) {
      if (features.length >= MAX_FEATURES) {
        throw new InputError(`there are more than ${MAX_FEATURES} features`, path, "split the layer");
      }
      const [blob, ...cells] = statement.get();
      const properties: Record<string, SqlValue> = Object.create(null);
      others.forEach((column, index) => {
        properties[column] = cells[index] ?? null;
      });
      features.push(featureOf(blob, properties));
    }
  } finally {
    statement.free();
  }
  return features;
}

function featureOf(
  blob: SqlValue | undefined,
  properties: Record<string, SqlValue>,
): GeoJsonFeature | string {
  if (blob === null || blob === undefined) return { type: "Feature", properties, geometry: null };
  if (!(blob instanceof Uint8Array)) return "its geometry is no block of bytes";
  const [g, p, version, flags] = blob;
  const envelopeBytes = ENVELOPE_BYTES[(flags >> 1) & 7];
  if (blob.length < 8 || g !== 0x47 || p !== 0x50 || version !== 0 || envelopeBytes === undefined) {
    return "its geometry does not begin as in a GeoPackage";
  }
  const isEmpty = (flags & 0x10) !== 0;
  if (isEmpty) return { type: "Feature", properties, geometry: null };
  try {
    return { type: "Feature", properties, geometry: readWkb(blob.subarray(8 + envelopeBytes)) };
  } catch (fault) {
    if (!(fault instanceof WkbFault)) throw fault;
    return `its geometry is damaged: ${fault.message}`;
  }
}

function rowsOf(database: Database, sql: string, parameters: SqlValue[] = []): SqlValue[][] {
  return database.exec(sql, parameters)[0]?.values ?? [];
}

function quoted(name: string): string {
  return `"${name.replaceAll('"', '""')}"`;
}
