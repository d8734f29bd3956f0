import { inflateSync } from "node:zlib";

/** A palette PNG as the W3C specification says to read one: apart from the writer, and for tests only. */
export function readPalettePng(bytes: Uint8Array): {
  width: number;
  height: number;
  palette: number[][];
  indices: Uint8Array;
} {
  const buffer = Buffer.from(bytes);
  const chunks = new Map<string, Buffer>();
  for (let at = 8; at < buffer.length; ) {
    const length = buffer.readUInt32BE(at);
    chunks.set(buffer.toString("latin1", at + 4, at + 8), buffer.subarray(at + 8, at + 8 + length));
    at += 12 + length;
  }
  const header = chunks.get("IHDR")!;
  const [width, height] = [header.readUInt32BE(0), header.readUInt32BE(4)];
  const raw = inflateSync(chunks.get("IDAT")!);
  const indices = new Uint8Array(width * height);
  for (let row = 0; row < height; row += 1) {
    const line = row * (width + 1);
    if (raw[line] !== 0) throw new Error(`row ${row} has a filter`);
    indices.set(raw.subarray(line + 1, line + 1 + width), row * width);
  }
  const colours = [...chunks.get("PLTE")!];
  const opacity = [...chunks.get("tRNS")!];
  const palette = opacity.map((alpha, i) => [...colours.slice(i * 3, i * 3 + 3), alpha]);
  return { width, height, palette, indices };
}
