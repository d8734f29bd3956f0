import { createHash } from "node:crypto";
import { existsSync, readFileSync, renameSync, writeFileSync } from "node:fs";
import { deserialize, serialize } from "node:v8";
import { deflateSync, inflateSync } from "node:zlib";

/**
 * Values on disk that a broken-off run may come back to: a SHA-256 of the content and the content; a file that does not
 * match is as good as none. It is written beside its name and renamed, so a file under its own name is whole.
 */
const HASH_BYTES = 32;

/** @param value - what may be cloned: numbers, texts, arrays, plain objects */
export function saveSealed(file: string, value: unknown): void {
  // Level 1: rain fields are mostly zero, and this is scratch space.
  const body = deflateSync(serialize(value), { level: 1 });
  const beside = `${file}.part`;
  try {
    writeFileSync(beside, Buffer.concat([createHash("sha256").update(body).digest(), body]));
    renameSync(beside, file);
  } catch (error) {
    // A write that fails (a full disk) does not say where; people must be told which disk it was.
    if (error instanceof Error && !("path" in error)) Object.assign(error, { path: beside });
    throw error;
  }
}

export function isSealed(file: string): boolean {
  return contentOf(file) !== undefined;
}

/** @returns undefined where there is no such file, or it is damaged */
export function loadSealed(file: string): unknown {
  const body = contentOf(file);
  return body === undefined ? undefined : deserialize(inflateSync(body));
}

function contentOf(file: string): Buffer | undefined {
  if (!existsSync(file)) return undefined;
  const bytes = readFileSync(file);
  const body = bytes.subarray(HASH_BYTES);
  return createHash("sha256").update(body).digest().equals(bytes.subarray(0, HASH_BYTES)) ? body : undefined;
}
