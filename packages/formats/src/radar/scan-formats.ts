import { InputError } from "@rainreckon/core";
import { HEAD_BYTES, hdf5Ready, readHead } from "../hdf5/index.ts";
import { odimFormat } from "./odim/format.ts";
import type { ScanFile, ScanFormat } from "./scan-file.ts";

/** Every format of radar scans that is read; the first that recognises a file opens it. */
export const SCAN_FORMATS: readonly ScanFormat[] = [odimFormat];

/** Loads what the readers need; once it is done, opening and reading are synchronous. */
export async function formatsReady(): Promise<void> {
  await hdf5Ready();
}

/**
 * Tells by its first bytes whether a file may hold radar scans. An HDF5 file is told from one that holds
 * something else only by opening it.
 *
 * @returns name of the format, or undefined
 * @throws InputError where the file cannot be opened
 */
export function recogniseScan(path: string): string | undefined {
  return formatOf(path)?.name;
}

/**
 * Opens a file of radar scans and reads the headers of its sweeps, but no array.
 *
 * @param path - the file; nothing else is opened
 * @throws InputError where the file is of no known format, or nothing in it can be used
 * @throws RangeError before {@link formatsReady} is done
 */
export function openScan(path: string): ScanFile {
  const format = formatOf(path);
  if (format === undefined) {
    const names = SCAN_FORMATS.map(({ name }) => name).join(", ");
    throw new InputError("not a radar scan of a known format", path, `leave it out; known are: ${names}`);
  }
  return format.open(path);
}

function formatOf(path: string): ScanFormat | undefined {
  const head = readHead(path, HEAD_BYTES);
  return SCAN_FORMATS.find((format) => format.recognise(head, path));
}
