import { open } from "node:fs/promises";
import { deflateSync } from "node:zlib";
import type { Grid } from "@rainreckon/core";
import { outputFault } from "./fault.ts";
import { geoKeys } from "./geo-keys.ts";
import { withoutControlCharacters } from "./text.ts";

/** One plane as a picture that knows its place. */
export interface GeoTiffSpec {
  readonly grid: Grid;
  /** The grid's system as a PROJ string; equal to `grid.crs` unless that is an authority code. */
  readonly projString: string;
  /** Shape [ny, nx], row 0 in the north; NaN is not observed. */
  readonly values: Float32Array;
  /** What the values are, in a few words, and their unit; both travel in the file. */
  readonly description: string;
  readonly unit: string;
}

const TILE = 256;
/** TIFF field types and their sizes in bytes. */
const ASCII = { type: 2, bytes: 1 };
const SHORT = { type: 3, bytes: 2 };
const LONG = { type: 4, bytes: 4 };
const DOUBLE = { type: 12, bytes: 8 };

/**
 * Write a plane as GeoTIFF to exactly this path: float32, 256 × 256 tiles, deflate with the
 * floating-point predictor, nodata NaN, pixels as areas; a plane larger than a tile carries overviews,
 * each of half the size of the one before, of means of the observed cells.
 *
 * The same values give the same bytes. On failure the file is left incomplete: whoever chose the
 * path removes it.
 *
 * @throws InputError when the file cannot be written, and of kind "usage" for a system that GeoTIFF
 *   cannot describe; RangeError when the values do not fit the grid
 * @remarks TIFF 6.0 (Aldus, 1992); predictor 3: Adobe Photoshop TIFF Technical Note 3 (2005); keys: see
 *   {@link geoKeys}; tags 42112 and 42113: GDAL's, read widely. All from memory, held against readers in tests.
 */
export async function writeGeoTiff(path: string, spec: GeoTiffSpec): Promise<void> {
  const { grid, values } = spec;
  if (values.length !== grid.nx * grid.ny) {
    throw new RangeError(`${values.length} values do not fill ${grid.ny} rows of ${grid.nx}`);
  }
  const pictures: Picture[] = [
    { fields: [...sizeFields(grid), ...placeFields(spec)], tiles: tilesOf(grid, values) },
  ];
  for (let plane = halved({ nx: grid.nx, ny: grid.ny, values }); plane !== undefined; plane = halved(plane)) {
    const reduced = { tag: 254, of: LONG, values: [1] };
    const fields = [reduced, ...sizeFields(plane), noDataField()];
    pictures.push({ fields, tiles: tilesOf(plane, plane.values) });
  }
  const header = headerBytes(pictures);
  try {
    const handle = await open(path, "w");
    try {
      for (const bytes of [header, ...pictures.flatMap(({ tiles }) => tiles)]) await handle.writeFile(bytes);
    } finally {
      await handle.close();
    }
  } catch (cause) {
    throw outputFault(path, cause);
  }
}

/** A picture of the file: the plane itself, or one of its overviews. */
interface Picture {
  readonly fields: readonly TiffField[];
  readonly tiles: readonly Buffer[];
}

interface Shape {
  readonly nx: number;
  readonly ny: number;
}

/** The same plane in cells of twice the size; undefined for one that fits into a tile. */
function halved({ nx, ny, values }: Shape & { readonly values: Float32Array }) {
  if (nx <= TILE && ny <= TILE) return undefined;
  const half = { nx: Math.ceil(nx / 2), ny: Math.ceil(ny / 2) };
  const means = new Float32Array(half.nx * half.ny);
  for (let cell = 0; cell < means.length; cell++) {
    const column = 2 * (cell % half.nx);
    const row = 2 * Math.floor(cell / half.nx);
    let sum = 0;
    let observed = 0;
    for (let y = row; y < Math.min(row + 2, ny); y++) {
      for (let x = column; x < Math.min(column + 2, nx); x++) {
        const value = values[y * nx + x];
        if (Number.isNaN(value)) continue;
        sum += value;
        observed += 1;
      }
    }
    means[cell] = observed === 0 ? Number.NaN : sum / observed;
  }
  return { ...half, values: means };
}

/** Compressed tiles, row by row of tiles. Cells beyond the grid's edge are NaN. */
function tilesOf(grid: Shape, values: Float32Array): Buffer[] {
  const tiles: Buffer[] = [];
  const cells = new Float32Array(TILE * TILE);
  // Little-endian, as on every machine that Node.js runs on but one.
  const cellBytes = new Uint8Array(cells.buffer);
  const predicted = new Uint8Array(TILE * TILE * 4);
  for (let row0 = 0; row0 < grid.ny; row0 += TILE) {
    for (let column0 = 0; column0 < grid.nx; column0 += TILE) {
      cells.fill(Number.NaN);
      const width = Math.min(TILE, grid.nx - column0);
      for (let row = row0; row < Math.min(row0 + TILE, grid.ny); row++) {
        const from = row * grid.nx + column0;
        cells.set(values.subarray(from, from + width), (row - row0) * TILE);
      }
      for (let row = 0; row < TILE; row++) {
        const start = row * TILE * 4;
        predictRow(cellBytes.subarray(start), predicted.subarray(start));
      }
      tiles.push(deflateSync(predicted, { level: 6 }));
    }
  }
  return tiles;
}

/**
 * Floating-point predictor: bytes of equal rank side by side, highest first, then differences
 * from byte to byte. Neighbouring depths share their high bytes, so those become zeros.
 */
function predictRow(littleEndian: Uint8Array, into: Uint8Array): void {
  let last = 0;
  for (let rank = 0; rank < 4; rank++) {
    for (let column = 0; column < TILE; column++) {
      const byte = littleEndian[column * 4 + 3 - rank];
      into[rank * TILE + column] = byte - last;
      last = byte;
    }
  }
}

interface TiffField {
  readonly tag: number;
  readonly of: { readonly type: number; readonly bytes: number };
  readonly values: ArrayLike<number>;
}

function sizeFields({ nx, ny }: Shape): TiffField[] {
  return [
    { tag: 256, of: LONG, values: [nx] },
    { tag: 257, of: LONG, values: [ny] },
    { tag: 258, of: SHORT, values: [32] },
    { tag: 259, of: SHORT, values: [8] }, // deflate
    { tag: 262, of: SHORT, values: [1] }, // more is brighter
    { tag: 277, of: SHORT, values: [1] }, // samples a pixel
    { tag: 284, of: SHORT, values: [1] }, // contiguous
    { tag: 317, of: SHORT, values: [3] }, // floating-point predictor
    { tag: 322, of: LONG, values: [TILE] },
    { tag: 323, of: LONG, values: [TILE] },
    { tag: 339, of: SHORT, values: [3] }, // floating point
  ];
}

function noDataField(): TiffField {
  return { tag: 42113, of: ASCII, values: asciiBytes("nan") };
}

function placeFields({ grid, projString, description, unit }: GeoTiffSpec): TiffField[] {
  const keys = geoKeys(grid.crs, projString);
  const fields: TiffField[] = [
    { tag: 33550, of: DOUBLE, values: [grid.cellM, grid.cellM, 0] },
    { tag: 33922, of: DOUBLE, values: [0, 0, 0, grid.westM, grid.northM, 0] },
    { tag: 34735, of: SHORT, values: keys.directory },
    { tag: 42112, of: ASCII, values: asciiBytes(bandMetadata(description, unit)) },
    noDataField(),
  ];
  if (keys.doubles.length > 0) fields.push({ tag: 34736, of: DOUBLE, values: keys.doubles });
  if (keys.ascii !== "") fields.push({ tag: 34737, of: ASCII, values: asciiBytes(keys.ascii) });
  return fields;
}

/** Texts are escaped twice, because the tag's own readers undo it twice. */
function bandMetadata(description: string, unit: string): string {
  const item = (name: string, role: string, text: string) =>
    `<Item name="${name}" sample="0" role="${role}">${escapedXml(escapedXml(text))}</Item>`;
  return `<GDALMetadata>${item("DESCRIPTION", "description", description)}${item("UNITTYPE", "unittype", unit)}</GDALMetadata>`;
}

function escapedXml(text: string): string {
  return withoutControlCharacters(text)
    .replaceAll("&", "&amp;")
    .replaceAll("<", "&lt;")
    .replaceAll(">", "&gt;")
    .replaceAll('"', "&quot;");
}

function asciiBytes(text: string): Uint8Array {
  return Buffer.from(`${text}\0`, "utf8");
}

/** Everything before the tiles: header, and for each picture its directory and the values too long for that. */
function headerBytes(pictures: readonly Picture[]): Buffer {
  const directories = pictures.map(({ fields, tiles }) => {
    const offsets = tiles.map(() => 0);
    const sizes = tiles.map((tile) => tile.length);
    const all = [
      ...fields,
      { tag: 324, of: LONG, values: offsets },
      { tag: 325, of: LONG, values: sizes },
    ].sort((a, b) => a.tag - b.tag);
    const outside = all.map(bytesOf).filter((bytes) => bytes > 4);
    const entryBytes = 2 + all.length * 12 + 4;
    const bytes = entryBytes + outside.reduce((sum, size) => sum + evenly(size), 0);
    return { fields: all, offsets, sizes, entryBytes, bytes };
  });
  const headerLength = directories.reduce((sum, { bytes }) => sum + bytes, 8);
  let tileAt = headerLength;
  for (const { offsets, sizes } of directories) {
    for (let tile = 0; tile < sizes.length; tile++) {
      offsets[tile] = tileAt;
      tileAt += sizes[tile];
    }
  }
  if (tileAt >= 2 ** 32) throw new RangeError("the picture is longer than the 4 GiB that TIFF can address");

  const bytes = Buffer.alloc(headerLength);
  bytes.write("II", 0, "latin1");
  bytes.writeUInt16LE(42, 2);
  bytes.writeUInt32LE(8, 4);
  let start = 8;
  for (const [index, directory] of directories.entries()) {
    writeDirectory(bytes, start, directory.fields, start + directory.entryBytes);
    start += directory.bytes;
    const isLast = index === directories.length - 1;
    bytes.writeUInt32LE(isLast ? 0 : start, start - directory.bytes + directory.entryBytes - 4);
  }
  return bytes;
}

function writeDirectory(bytes: Buffer, start: number, fields: readonly TiffField[], outsideAt: number): void {
  bytes.writeUInt16LE(fields.length, start);
  let entryAt = start + 2;
  let valuesAt = outsideAt;
  for (const field of fields) {
    bytes.writeUInt16LE(field.tag, entryAt);
    bytes.writeUInt16LE(field.of.type, entryAt + 2);
    bytes.writeUInt32LE(field.values.length, entryAt + 4);
    if (bytesOf(field) > 4) {
      bytes.writeUInt32LE(valuesAt, entryAt + 8);
      writeValues(bytes, valuesAt, field);
      valuesAt += evenly(bytesOf(field));
    } else {
      writeValues(bytes, entryAt + 8, field);
    }
    entryAt += 12;
  }
}

function bytesOf({ of, values }: TiffField): number {
  return of.bytes * values.length;
}

/** TIFF wants values to begin on even bytes. */
function evenly(bytes: number): number {
  return bytes + (bytes % 2);
}

function writeValues(bytes: Buffer, at: number, { of, values }: TiffField): void {
  for (let index = 0; index < values.length; index++) {
    const place = at + index * of.bytes;
    if (of === DOUBLE) bytes.writeDoubleLE(values[index], place);
    else if (of === LONG) bytes.writeUInt32LE(values[index], place);
    else if (of === SHORT) bytes.writeUInt16LE(values[index], place);
    else bytes.writeUInt8(values[index], place);
  }
}
