import { readFileSync, statSync } from "node:fs";
import { InputError } from "@rainreckon/core";
import type { ScanFile, ScanOptions } from "../scan-file.ts";
import { sourcedScan } from "../sourced-scan.ts";
import { contentKey } from "./decompress.ts";
import { unpack } from "./records.ts";
import { type RawVolume, rawVolume, volumeSweeps } from "./volume.ts";

export const LEVEL2_NAME = "Archive Level II";
const MAX_FILE_BYTES = 400_000_000;

/**
 * The volume unpacked last, by its content: sweeps of one volume are read one after the other, each time the file is
 * opened anew, and unpacking takes a hundred times longer than telling that nothing has changed.
 */
let latest: { readonly key: string; readonly raw: RawVolume } | undefined;

/**
 * Opens an Archive Level II file: messages 31 and 1, packed by bzip2 in records, by gzip or bzip2 as a whole, or not.
 *
 * @returns undefined where it is a bzip2 file of something else
 * @throws InputError where it is damaged, holds no radar data, or does not say where its radar stands
 * @see Interface Control Documents 2620002 (RDA/RPG) and 2620010 (Archive II/User), NOAA Radar Operations Center
 */
export function openLevel2(path: string, options: ScanOptions = {}): ScanFile | undefined {
  const raw = readRaw(path);
  if (raw.radials.length === 0 && !raw.hasVolumeHeader) return undefined;
  const { sweeps, remarks, leftOut } = volumeSweeps(path, raw, options);
  return sourcedScan(path, LEVEL2_NAME, sweeps, { remarks, leftOut }, () => undefined);
}

/** Reads and unpacks a whole file. @throws InputError where that cannot be done */
export function readRaw(path: string): RawVolume {
  const bytes = readWhole(path);
  const key = contentKey(bytes);
  if (latest?.key === key) return latest.raw;
  const raw = rawVolume(unpack(bytes, path));
  latest = { key, raw };
  return raw;
}

function readWhole(path: string): Buffer {
  try {
    if (statSync(path).size > MAX_FILE_BYTES) {
      throw new InputError("the file is larger than any radar volume", path, "leave it out");
    }
    return readFileSync(path);
  } catch (error) {
    if (error instanceof InputError) throw error;
    const code = error instanceof Error && "code" in error ? String(error.code) : "unknown fault";
    throw new InputError(`cannot be opened (${code})`, path, "check that the file exists and may be read", {
      cause: error,
    });
  }
}
