import { deflateSync } from "node:zlib";

/** A raster of heights in whole metres on a WGS 84 longitude-latitude grid, row 0 in the north. */
export interface HeightRaster {
  readonly westDeg: number;
  readonly northDeg: number;
  readonly cellLonDeg: number;
  readonly cellLatDeg: number;
  readonly nx: number;
  readonly ny: number;
  /** Shape [ny, nx]. */
  readonly heightM: Int16Array;
}

/** TIFF field types: number of bytes each value takes. */
const SHORT = 3;
const LONG = 4;
const DOUBLE = 12;
const ASCII = 2;
const SIZE: Readonly<Record<number, number>> = { [SHORT]: 2, [LONG]: 4, [DOUBLE]: 8, [ASCII]: 1 };

interface TiffField {
  readonly tag: number;
  readonly type: number;
  readonly values: readonly number[];
}

/**
 * A GeoTIFF of one strip, deflate-compressed, int16, area pixels, EPSG:4326.
 * Sources: TIFF 6.0 (Adobe, 1992); OGC 19-008r4 GeoTIFF 1.1.
 */
export function heightGeoTiff(raster: HeightRaster): Buffer {
  const pixels = deflateSync(Buffer.from(raster.heightM.buffer), { level: 9 });
  const dataAt = 8;
  const directoryAt = dataAt + pixels.length + (pixels.length % 2);
  const fields: TiffField[] = [
    { tag: 256, type: LONG, values: [raster.nx] },
    { tag: 257, type: LONG, values: [raster.ny] },
    { tag: 258, type: SHORT, values: [16] },
    { tag: 259, type: SHORT, values: [8] },
    { tag: 262, type: SHORT, values: [1] },
    { tag: 273, type: LONG, values: [dataAt] },
    { tag: 277, type: SHORT, values: [1] },
    { tag: 278, type: LONG, values: [raster.ny] },
    { tag: 279, type: LONG, values: [pixels.length] },
    { tag: 339, type: SHORT, values: [2] },
    { tag: 33550, type: DOUBLE, values: [raster.cellLonDeg, raster.cellLatDeg, 0] },
    { tag: 33922, type: DOUBLE, values: [0, 0, 0, raster.westDeg, raster.northDeg, 0] },
    // Model type geographic, raster type area, geodetic system EPSG:4326.
    { tag: 34735, type: SHORT, values: [1, 1, 0, 3, 1024, 0, 1, 2, 1025, 0, 1, 1, 2048, 0, 1, 4326] },
    // GDAL's nodata tag: the generator knows every height, so the code is one that never occurs.
    { tag: 42113, type: ASCII, values: [...Buffer.from("-32768\0")] },
  ];
  return Buffer.concat([
    header(directoryAt),
    pixels,
    Buffer.alloc(directoryAt - dataAt - pixels.length),
    directory(fields, directoryAt),
  ]);
}

function header(directoryAt: number): Buffer {
  const bytes = Buffer.alloc(8);
  bytes.write("II", "latin1");
  bytes.writeUInt16LE(42, 2);
  bytes.writeUInt32LE(directoryAt, 4);
  return bytes;
}

/** The image file directory, followed by the values that do not fit into four bytes. */
function directory(fields: readonly TiffField[], at: number): Buffer {
  const table = Buffer.alloc(2 + fields.length * 12 + 4);
  const overflow: Buffer[] = [];
  let overflowAt = at + table.length;
  table.writeUInt16LE(fields.length, 0);
  fields.forEach(({ tag, type, values }, i) => {
    const entry = 2 + i * 12;
    const bytes = encodeValues(type, values);
    table.writeUInt16LE(tag, entry);
    table.writeUInt16LE(type, entry + 2);
    table.writeUInt32LE(values.length, entry + 4);
    if (bytes.length <= 4) {
      bytes.copy(table, entry + 8);
      return;
    }
    table.writeUInt32LE(overflowAt, entry + 8);
    overflow.push(bytes);
    overflowAt += bytes.length;
  });
  return Buffer.concat([table, ...overflow]);
}

function encodeValues(type: number, values: readonly number[]): Buffer {
  const bytes = Buffer.alloc(values.length * SIZE[type]! + ((values.length * SIZE[type]!) % 2));
  values.forEach((value, i) => {
    if (type === SHORT) bytes.writeUInt16LE(value, i * 2);
    else if (type === LONG) bytes.writeUInt32LE(value, i * 4);
    else if (type === DOUBLE) bytes.writeDoubleLE(value, i * 8);
    else bytes.writeUInt8(value, i);
  });
  return bytes;
}
