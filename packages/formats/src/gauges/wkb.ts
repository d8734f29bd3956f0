/*
 * Well-known binary: OGC 06-103r4 (Simple Features, Part 1), clause 8; types with heights and measures by
 * the thousands of ISO 13249-3. Polygons and multipolygons only.
 */

const POLYGON = 3;
const MULTI_POLYGON = 6;
const TYPE_NAMES: Readonly<Record<number, string>> = {
  1: "Point",
  2: "LineString",
  4: "MultiPoint",
  5: "MultiLineString",
  7: "GeometryCollection",
  10: "CurvePolygon",
  12: "MultiSurface",
};

export interface WkbGeometry {
  readonly type: string;
  readonly coordinates?: unknown;
}

/** Thrown where the bytes are not what they say. */
export class WkbFault extends Error {}

/**
 * A polygon or multipolygon from its bytes, heights and measures left out; of any other type its name alone.
 *
 * @throws WkbFault where counts do not fit the bytes, or a number is none
 */
export function readWkb(bytes: Uint8Array): WkbGeometry {
  const cursor = new Cursor(bytes);
  const geometry = readGeometry(cursor);
  if (geometry.coordinates !== undefined && !cursor.atEnd) throw new WkbFault("bytes follow the geometry");
  return geometry;
}

function readGeometry(cursor: Cursor): WkbGeometry {
  const { type, dimensions } = cursor.header();
  if (type === POLYGON) return { type: "Polygon", coordinates: readRings(cursor, dimensions) };
  if (type !== MULTI_POLYGON) return { type: TYPE_NAMES[type] ?? `geometry of type ${type}` };
  const count = cursor.count(9);
  const polygons: unknown[] = [];
  for (let k = 0; k < count; k++) {
    const part = cursor.header();
    if (part.type !== POLYGON) throw new WkbFault("a part of a multipolygon is no polygon");
    polygons.push(readRings(cursor, part.dimensions));
  }
  return { type: "MultiPolygon", coordinates: polygons };
}

function readRings(cursor: Cursor, dimensions: number): [number, number][][] {
  const ringCount = cursor.count(4);
  const rings: [number, number][][] = [];
  for (let ring = 0; ring < ringCount; ring++) {
    const count = cursor.count(8 * dimensions);
    const positions: [number, number][] = [];
    for (let k = 0; k < count; k++) positions.push(cursor.position(dimensions));
    rings.push(positions);
  }
  return rings;
}

class Cursor {
  readonly #view: DataView;
  #at = 0;
  #littleEndian = true;

  constructor(bytes: Uint8Array) {
    this.#view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  }

  get atEnd(): boolean {
    return this.#at === this.#view.byteLength;
  }

  header(): { readonly type: number; readonly dimensions: number } {
    this.#need(5);
    const order = this.#view.getUint8(this.#at);
    if (order > 1) throw new WkbFault("the order of its bytes is unknown");
    this.#littleEndian = order === 1;
    const code = this.#view.getUint32(this.#at + 1, this.#littleEndian);
    this.#at += 5;
    const thousands = Math.floor(code / 1000);
    if (thousands > 3) throw new WkbFault(`its type ${code} is unknown`);
    return { type: code % 1000, dimensions: thousands === 0 ? 2 : thousands === 3 ? 4 : 3 };
  }

  /** A count of things that each take so many bytes at least: no more than there are bytes for. */
  count(bytesEach: number): number {
    this.#need(4);
    const count = this.#view.getUint32(this.#at, this.#littleEndian);
    this.#at += 4;
    this.#need(count * bytesEach);
    return count;
  }

  position(dimensions: number): [number, number] {
    const x = this.#view.getFloat64(this.#at, this.#littleEndian);
    const y = this.#view.getFloat64(this.#at + 8, this.#littleEndian);
    this.#at += 8 * dimensions;
    if (!Number.isFinite(x) || !Number.isFinite(y)) throw new WkbFault("a position is no pair of numbers");
    return [x, y];
  }

  #need(bytes: number): void {
    if (this.#at + bytes > this.#view.byteLength) throw new WkbFault("it is shorter than it says");
  }
}
