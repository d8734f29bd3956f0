import { closeSync, openSync, readSync } from "node:fs";
import path from "node:path";

const SIGNATURES: readonly { readonly kind: string; readonly bytes: readonly number[] }[] = [
  { kind: "HDF5 or NetCDF-4", bytes: [0x89, 0x48, 0x44, 0x46] },
  { kind: "NetCDF classic", bytes: [0x43, 0x44, 0x46] },
  { kind: "gzip", bytes: [0x1f, 0x8b] },
  { kind: "bzip2", bytes: [0x42, 0x5a, 0x68] },
  { kind: "zip", bytes: [0x50, 0x4b, 0x03, 0x04] },
  { kind: "TIFF", bytes: [0x49, 0x49, 0x2a, 0x00] },
  { kind: "TIFF", bytes: [0x4d, 0x4d, 0x00, 0x2a] },
  { kind: "PDF", bytes: [0x25, 0x50, 0x44, 0x46] },
  { kind: "PNG picture", bytes: [0x89, 0x50, 0x4e, 0x47] },
  { kind: "JPEG picture", bytes: [0xff, 0xd8, 0xff] },
];

/** What a file that nothing here reads seems to be, by its first bytes, else by the ending of its name. */
export function fileKind(file: string): string {
  const head = firstBytes(file, 8);
  if (head === undefined) return "unreadable";
  if (head.length === 0) return "empty";
  const known = SIGNATURES.find(({ bytes }) => bytes.every((byte, index) => head[index] === byte));
  const ending = path.extname(file).toLowerCase();
  return known?.kind ?? (ending === "" ? "without an ending" : ending);
}

function firstBytes(file: string, count: number): Uint8Array | undefined {
  try {
    const handle = openSync(file, "r");
    try {
      const buffer = new Uint8Array(count);
      return buffer.subarray(0, readSync(handle, buffer, 0, count, 0));
    } finally {
      closeSync(handle);
    }
  } catch {
    return undefined;
  }
}
