import { InputError } from "@rainreckon/core";
import { HEAD_BYTES, hdf5Ready, readHead } from "../hdf5/index.ts";
import { cfradial1Format, cfradial2Format } from "./cfradial/format.ts";
import { level2Format } from "./level2/format.ts";
import { odimFormat } from "./odim/format.ts";
import type { ScanFile, ScanFormat, ScanOptions } from "./scan-file.ts";

/** Every format of radar scans that is read; the first that recognises a file and finds itself inside opens it. */
export const SCAN_FORMATS: readonly ScanFormat[] = [
  odimFormat,
  cfradial1Format,
  cfradial2Format,
  level2Format,
];

/** Loads what the readers need; once it is done, opening and reading are synchronous. */
export async function formatsReady(): Promise<void> {
  await hdf5Ready();
}

/**
 * Tells by its first bytes whether a file may hold radar scans. Formats inside one container (HDF5, say) are told
 * from each other, and from what else it may hold, only by opening the file.
 *
 * @returns name of the first format that it may be, or undefined
 * @throws InputError where the file cannot be opened
 */
export function recogniseScan(path: string): string | undefined {
  return candidates(path)[0]?.name;
}

/**
 * Opens a file of radar scans and reads the headers of its sweeps, but no array.
 *
 * @param path - the file; nothing else is opened
 * @param options - what the file may not say itself
 * @throws InputError where the file is of no known format, or nothing in it can be used
 * @throws RangeError before {@link formatsReady} is done
 */
export function openScan(path: string, options: ScanOptions = {}): ScanFile {
  const formats = candidates(path);
  for (const format of formats) {
    const file = format.open(path, options);
    if (file !== undefined) return file;
  }
  const known = SCAN_FORMATS.map(({ name }) => name).join(", ");
  const tried = formats.map(({ name }) => name).join(", nor ");
  throw new InputError(
    tried === ""
      ? "not a radar scan of a known format"
      : `it starts like a radar scan, but is not ${tried} inside`,
    path,
    `leave it out; known are: ${known}`,
  );
}

function candidates(path: string): readonly ScanFormat[] {
  const head = readHead(path, HEAD_BYTES);
  return SCAN_FORMATS.filter((format) => format.recognise(head, path));
}
