import { createHash } from "node:crypto";
import { createReadStream } from "node:fs";
import { open } from "node:fs/promises";
import { InputError } from "@rainreckon/core";
import { outputFault } from "./fault.ts";

/** Pieces are gathered up to this many characters before they go to the disk. */
const GATHERED_CHARACTERS = 1 << 16;

/**
 * Write text to exactly this path, UTF-8, replacing what was there.
 *
 * Pieces are written as they come, so a long table is never whole in memory. On failure the file
 * is left as it is, incomplete: whoever chose the path renames or removes it.
 *
 * @param path - where to write
 * @param text - the text, or its pieces in order
 * @throws InputError of kind "usage" when the place cannot be written, "midway" when the disk is full;
 *   whatever the pieces themselves throw passes through
 */
export async function writeText(
  path: string,
  text: string | Iterable<string> | AsyncIterable<string>,
): Promise<void> {
  const onFault = (cause: unknown): never => {
    throw outputFault(path, cause);
  };
  const handle = await open(path, "w").catch(onFault);
  try {
    let gathered = "";
    for await (const piece of typeof text === "string" ? [text] : text) {
      gathered += piece;
      if (gathered.length < GATHERED_CHARACTERS) continue;
      await handle.writeFile(gathered).catch(onFault);
      gathered = "";
    }
    await handle.writeFile(gathered).catch(onFault);
  } finally {
    await handle.close().catch(onFault);
  }
}

/**
 * SHA-256 of a file's bytes, read as a stream.
 *
 * @returns 64 lower-case hexadecimal digits
 * @throws InputError when the file cannot be read
 * @remarks FIPS 180-4 (NIST, 2015), by node:crypto.
 */
export async function sha256OfFile(path: string): Promise<string> {
  const hash = createHash("sha256");
  try {
    for await (const bytes of createReadStream(path)) hash.update(bytes);
  } catch (cause) {
    throw new InputError("the file cannot be read", path, "check that it is there and readable", { cause });
  }
  return hash.digest("hex");
}

/**
 * Text without control characters (C0, DEL, C1 and the Unicode line separators).
 *
 * Line breaks and tabs become one space each, so that words do not run together; the others vanish.
 *
 * @param keepLineFeeds - true keeps LF, for texts of several lines
 */
export function withoutControlCharacters(text: string, keepLineFeeds = false): string {
  const spaced = text.replace(/\r\n|[\t\r\u0085\u2028\u2029]/g, (found) =>
    keepLineFeeds && found === "\r\n" ? "\n" : " ",
  );
  const lined = keepLineFeeds ? spaced : spaced.replace(/\n/g, " ");
  return lined.replace(/[\u0000-\u0009\u000b-\u001f\u007f-\u009f]/g, "");
}
