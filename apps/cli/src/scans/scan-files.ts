import path from "node:path";
import { InputError, type Notice } from "@rainreckon/core";
import {
  isScanChunk,
  openScan,
  openScanChunks,
  recogniseScan,
  type ScanFile,
  type ScanOptions,
} from "@rainreckon/formats";

/** What holds the sweeps of one file of scans, or of one volume that was sent in several. */
export interface ScanPaths {
  readonly path: string;
  /** The chunks of one volume in the order of their names, where it is several files. */
  readonly chunks?: readonly string[];
}

/** Opens a file of scans, or the chunks of a volume as one. @throws InputError as the readers do */
export function openScans({ path: file, chunks }: ScanPaths, options: ScanOptions = {}): ScanFile {
  return chunks === undefined ? openScan(file, options) : openScanChunks(chunks, options);
}

/**
 * Puts the chunks of real-time volumes together: a scan file, and the files without a volume header of their own that
 * follow it by name in the same folder. Everything else stays as it is, one file each.
 *
 * @param files - in the order of their names
 * @param onNotice - is told of chunks that do not join, and of numbers missing in their names
 */
export function joinChunks(
  files: readonly string[],
  options: ScanOptions,
  onNotice: (notice: Notice) => void,
): ScanPaths[] {
  const groups: string[][] = [];
  for (const file of files) {
    const last = groups.at(-1);
    if (last !== undefined && path.dirname(last[0]) === path.dirname(file) && isChunk(file)) last.push(file);
    else groups.push([file]);
  }
  return groups.flatMap((group) => joined(group, options, onNotice));
}

/** A file that cannot be opened is no chunk; who reads it says why. */
function isChunk(file: string): boolean {
  try {
    return isScanChunk(file);
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    return false;
  }
}

function joined(
  group: readonly string[],
  options: ScanOptions,
  onNotice: (notice: Notice) => void,
): ScanPaths[] {
  if (group.length === 1) return [{ path: group[0] }];
  // What stands before the first chunk may be anything; only a scan can begin a volume.
  if (recogniseScan(group[0]) === undefined)
    return [{ path: group[0] }, ...joined(group.slice(1), options, onNotice)];
  try {
    openScanChunks(group, options).close();
    tellMissing(group, onNotice);
    return [{ path: group[0], chunks: group }];
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    // A chunk of another volume begins one of its own; what is wrong with a file by itself is said by who reads it.
    const at = group.findIndex((file) => error.where.startsWith(file));
    if (at > 0)
      return [group.slice(0, at), group.slice(at)].flatMap((part) => joined(part, options, onNotice));
    onNotice(error);
    return group.map((file) => ({ path: file }));
  }
}

const LAST_NUMBER = /^(.*?)(\d+)(\D*)$/;

function tellMissing(group: readonly string[], onNotice: (notice: Notice) => void): void {
  for (let k = 1; k < group.length; k++) {
    const before = LAST_NUMBER.exec(path.basename(group[k - 1]));
    const after = LAST_NUMBER.exec(path.basename(group[k]));
    if (before === null || after === null || before[1] !== after[1]) continue;
    const missing = Number(after[2]) - Number(before[2]) - 1;
    if (missing < 1) continue;
    onNotice({
      what: `${missing === 1 ? "1 chunk" : `${missing} chunks`} of this volume missing before it, by the numbers in the names: what is there is read`,
      where: group[k],
      fix: "fetch what is missing",
    });
  }
}
