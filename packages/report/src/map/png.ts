import { deflateSync } from "node:zlib";

/** Red, green, blue and opacity, 0 to 255 each. */
export type Rgba = readonly [number, number, number, number];

const SIGNATURE = Uint8Array.of(0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a);

const CRC_TABLE = Uint32Array.from({ length: 256 }, (_, byte) => {
  let c = byte;
  for (let bit = 0; bit < 8; bit += 1) c = c & 1 ? 0xedb88320 ^ (c >>> 1) : c >>> 1;
  return c;
});

/** CRC-32 as PNG chunks carry it (ISO 3309; W3C PNG specification, annex D). */
export function crc32(bytes: Uint8Array): number {
  let crc = 0xffffffff;
  for (const byte of bytes) crc = CRC_TABLE[(crc ^ byte) & 0xff] ^ (crc >>> 8);
  return (crc ^ 0xffffffff) >>> 0;
}

function chunk(type: string, data: Uint8Array): Uint8Array {
  const bytes = new Uint8Array(12 + data.length);
  const view = new DataView(bytes.buffer);
  view.setUint32(0, data.length);
  for (let i = 0; i < 4; i += 1) bytes[4 + i] = type.charCodeAt(i);
  bytes.set(data, 8);
  view.setUint32(8 + data.length, crc32(bytes.subarray(4, 8 + data.length)));
  return bytes;
}

/**
 * A PNG picture of palette indices (colour type 3, eight bits; W3C PNG specification).
 *
 * @param indices - shape [height, width], row-major, top row first; each below the palette's length
 * @param palette - 1 to 256 colours
 * @returns the bytes of the file; the same for the same input
 * @throws RangeError for a shape, palette or index that does not fit
 * @example
 * palettePng(Uint8Array.of(0, 1), 2, 1, [[0, 0, 0, 0], [255, 255, 255, 255]]);
 */
export function palettePng(
  indices: Uint8Array,
  width: number,
  height: number,
  palette: readonly Rgba[],
): Uint8Array {
  if (!(width > 0 && height > 0) || indices.length !== width * height) {
    throw new RangeError(`${indices.length} indices do not fill ${width} x ${height} pixels`);
  }
  if (palette.length < 1 || palette.length > 256) throw new RangeError("a palette holds 1 to 256 colours");
  if (indices.some((index) => index >= palette.length)) throw new RangeError("an index outside the palette");

  const header = new Uint8Array(13);
  const view = new DataView(header.buffer);
  view.setUint32(0, width);
  view.setUint32(4, height);
  header.set([8, 3, 0, 0, 0], 8);

  // Each row begins with its filter type; 0 (none) suits indices, which are not quantities.
  const rows = new Uint8Array(height * (width + 1));
  for (let row = 0; row < height; row += 1) {
    rows.set(indices.subarray(row * width, (row + 1) * width), row * (width + 1) + 1);
  }
  return Buffer.concat([
    SIGNATURE,
    chunk("IHDR", header),
    chunk("PLTE", Uint8Array.from(palette.flatMap((colour) => colour.slice(0, 3)))),
    chunk("tRNS", Uint8Array.from(palette.map(([, , , a]) => a))),
    chunk("IDAT", deflateSync(rows, { level: 9 })),
    chunk("IEND", new Uint8Array(0)),
  ]);
}

/** A picture as an address that needs no network. */
export function pngDataUri(png: Uint8Array): string {
  return `data:image/png;base64,${Buffer.from(png).toString("base64")}`;
}
