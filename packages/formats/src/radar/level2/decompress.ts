/// <reference path="./seek-bzip.d.ts" />
import { createHash } from "node:crypto";
import { gunzipSync } from "node:zlib";
import { InputError } from "@rainreckon/core";
import bzip2 from "seek-bzip";

/** More than any volume holds: the largest are about 60 MB. */
export const MAX_VOLUME_BYTES = 400_000_000;
/** Real volumes stay below 20; a record of empty frames is small enough to be let through below. */
const MAX_RATIO = 200;
/** Output that small input may always make: a ratio says little of a block that is nearly empty. */
const FREE_BYTES = 4_000_000;

/** Bytes of a bzip2 stream. @throws InputError where it is damaged, or grows beyond `room` or a sound ratio */
export function bunzip(bytes: Uint8Array, room: number, where: string): Buffer {
  const limit = Math.min(room, Math.max(FREE_BYTES, bytes.length * MAX_RATIO));
  let out = Buffer.allocUnsafe(Math.min(limit, Math.max(65_536, bytes.length * 8)));
  let length = 0;
  let overflow = false;
  const sink = {
    writeByte(byte: number) {
      if (length === out.length) {
        if (length >= limit) {
          overflow = true;
          throw new RangeError("more bytes than there may be");
        }
        const grown = Buffer.allocUnsafe(Math.min(limit, out.length * 2));
        out.copy(grown);
        out = grown;
      }
      out[length++] = byte;
    },
  };
  try {
    bzip2.decode(bytes, sink);
  } catch (cause) {
    if (overflow) throw tooLarge(where);
    throw new InputError("the file is damaged: a bzip2 block cannot be unpacked", where, "fetch it again", {
      cause,
    });
  }
  return out.subarray(0, length);
}

/** Bytes of a gzip file. @throws InputError where it is damaged or grows beyond what a volume holds */
export function gunzip(bytes: Uint8Array, path: string): Buffer {
  try {
    const limit = Math.min(MAX_VOLUME_BYTES, Math.max(FREE_BYTES, bytes.length * MAX_RATIO));
    return gunzipSync(bytes, { maxOutputLength: limit });
  } catch (cause) {
    const code = cause instanceof Error && "code" in cause ? cause.code : undefined;
    if (code === "ERR_BUFFER_TOO_LARGE") throw tooLarge(path);
    throw new InputError("the file is damaged: its gzip stream cannot be unpacked", path, "fetch it again", {
      cause,
    });
  }
}

function tooLarge(where: string): InputError {
  return new InputError(
    "unpacks to more bytes than a radar volume can have",
    where,
    "leave it out: it is damaged, or no radar scan",
  );
}

/** Tells contents apart, so that what was unpacked once need not be again. */
export function contentKey(bytes: Uint8Array): string {
  return createHash("sha256").update(bytes).digest("hex");
}
