import { createReadStream, createWriteStream } from "node:fs";
import { stat } from "node:fs/promises";
import { Readable } from "node:stream";
import { pipeline } from "node:stream/promises";
import { createGzip } from "node:zlib";
import { outputFault } from "./fault.ts";

/** A file of an archive: its name there, with forward slashes, and its bytes, as text or from a path. */
export type ArchiveEntry =
  | { readonly name: string; readonly text: string }
  | { readonly name: string; readonly path: string };

const BLOCK = 512;
/** Sizes from here on do not fit into the eleven octal digits of a plain header. */
const MOST_PLAIN_BYTES = 8 ** 11;
/** Where the fields of a header lie and how long they are. */
const FIELD = {
  name: [0, 100],
  mode: [100, 8],
  uid: [108, 8],
  gid: [116, 8],
  size: [124, 12],
  mtime: [136, 12],
  checksum: [148, 8],
  type: [156, 1],
  magic: [257, 6],
  version: [263, 2],
} as const;

/**
 * Writes files as one tar archive, compressed by gzip. The same entries give the same bytes: owners are 0, permissions
 * 0644, and all times are the one given. Files are read as they are written, so none is ever whole in memory.
 *
 * @param path - where to write; on failure what was written is left incomplete
 * @param entries - names relative, without "..", each once
 * @throws RangeError for such a name; InputError where the archive cannot be written or a file cannot be read
 * @remarks POSIX.1-2017, pax, "ustar Interchange Format" and "pax Interchange Format" (extended headers carry names of
 * more than 100 characters, or beyond ASCII, and sizes from 8 GiB on); RFC 1952 for gzip.
 */
export async function writeTarGz(
  path: string,
  entries: readonly ArchiveEntry[],
  timeEpochMs: number,
): Promise<void> {
  const met = new Set<string>();
  for (const { name } of entries) {
    const parts = name.split("/");
    if (met.has(name) || parts.some((part) => part === "" || part === "." || part === ".."))
      throw new RangeError(`"${name}" cannot be the name of a file in an archive, or is there twice`);
    met.add(name);
  }
  try {
    await pipeline(
      Readable.from(blocks(entries, Math.floor(timeEpochMs / 1000))),
      createGzip({ level: 6 }),
      createWriteStream(path),
    );
  } catch (cause) {
    throw outputFault(path, cause);
  }
}

async function* blocks(entries: readonly ArchiveEntry[], seconds: number): AsyncGenerator<Buffer> {
  for (const entry of entries) {
    const text = "text" in entry ? Buffer.from(entry.text, "utf8") : undefined;
    const size = "path" in entry ? (await stat(entry.path)).size : (text?.length ?? 0);
    const records: string[] = [];
    const isPlain = /^[\x20-\x7e]{1,100}$/.test(entry.name);
    if (!isPlain) records.push(record("path", entry.name));
    if (size >= MOST_PLAIN_BYTES) records.push(record("size", String(size)));
    if (records.length > 0) {
      const extended = Buffer.from(records.join(""), "utf8");
      yield header("pax-header", extended.length, seconds, "x");
      yield extended;
      yield padding(extended.length);
    }
    const short = isPlain ? entry.name : entry.name.replaceAll(/[^\x20-\x7e]/g, "_").slice(-100);
    yield header(short, size < MOST_PLAIN_BYTES ? size : 0, seconds, "0");
    if (text !== undefined) yield text;
    if ("path" in entry) {
      let written = 0;
      for await (const bytes of createReadStream(entry.path)) {
        written += (bytes as Buffer).length;
        yield bytes as Buffer;
      }
      // A file that grows or shrinks meanwhile would shift all that follow.
      if (written !== size) throw new Error(`${entry.path} changed while it was read`);
    }
    yield padding(size);
  }
  yield Buffer.alloc(2 * BLOCK);
}

/** "27 path=long/name\n": its own length leads, and counts itself. */
function record(key: string, value: string): string {
  const rest = ` ${key}=${value}\n`;
  const bytes = Buffer.byteLength(rest, "utf8");
  let length = bytes + String(bytes).length;
  if (bytes + String(length).length !== length) length = bytes + String(length).length;
  return `${length}${rest}`;
}

function header(name: string, size: number, seconds: number, type: "0" | "x"): Buffer {
  const block = Buffer.alloc(BLOCK);
  const write = (field: keyof typeof FIELD, text: string) => block.write(text, FIELD[field][0], "latin1");
  const octal = (field: keyof typeof FIELD, value: number) =>
    write(field, `${value.toString(8).padStart(FIELD[field][1] - 1, "0")}\0`);
  write("name", name);
  octal("mode", 0o644);
  octal("uid", 0);
  octal("gid", 0);
  octal("size", size);
  octal("mtime", Math.max(0, seconds));
  write("type", type);
  write("magic", "ustar\0");
  write("version", "00");
  // The sum is taken with blanks in its own place.
  write("checksum", " ".repeat(8));
  const sum = block.reduce((total, byte) => total + byte, 0);
  write("checksum", `${sum.toString(8).padStart(6, "0")}\0 `);
  return block;
}

function padding(size: number): Buffer {
  return Buffer.alloc((BLOCK - (size % BLOCK)) % BLOCK);
}
