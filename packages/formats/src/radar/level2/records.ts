import { InputError } from "@rainreckon/core";
import { bunzip, gunzip, MAX_VOLUME_BYTES } from "./decompress.ts";

/** Bytes of the volume header at the head of a file. */
const VOLUME_HEADER_BYTES = 24;
const MAX_RECORDS = 2000;

/** What a file holds once it is unpacked. */
export interface Unpacked {
  /** Messages one after the other, record by record; a message never crosses from one record to the next. */
  readonly records: readonly Buffer[];
  /** Station identifier of the volume header; undefined in a later chunk of a volume, which has no header. */
  readonly station?: string;
  readonly hasVolumeHeader: boolean;
  /** True where the file ends within a record: what came before is whole. */
  readonly cutShort: boolean;
}

/** Whether the first bytes are those of a volume header: "AR2V0006." say, or the older "ARCHIVE2.". */
export function hasVolumeHeader(head: Uint8Array): boolean {
  const text = Buffer.from(head.subarray(0, 9)).toString("latin1");
  return /^(AR2V\d{4}\.|ARCHIVE2\.)$/.test(text);
}

/** Whether bytes begin a record: its length, then a bzip2 stream. */
export function startsRecord(bytes: Uint8Array): boolean {
  return isBzip2(bytes.subarray(4));
}

export function isBzip2(bytes: Uint8Array): boolean {
  return (
    bytes[0] === 0x42 &&
    bytes[1] === 0x5a &&
    bytes[2] === 0x68 &&
    (bytes[3] as number) >= 0x31 &&
    (bytes[3] as number) <= 0x39
  );
}

export function isGzip(bytes: Uint8Array): boolean {
  return bytes[0] === 0x1f && bytes[1] === 0x8b && bytes[2] === 8;
}

/**
 * Takes the packing off a file: gzip or bzip2 around it all, and bzip2 in records, or none.
 *
 * @throws InputError where nothing can be unpacked
 * @see Interface Control Document for the Archive II/User, 2620010, NOAA Radar Operations Center: section 7.3, the
 *   volume header record and the compressed records that follow it
 */
export function unpack(file: Buffer, path: string): Unpacked {
  let bytes = file;
  if (isGzip(bytes)) bytes = gunzip(bytes, path);
  else if (isBzip2(bytes)) bytes = bunzip(bytes, MAX_VOLUME_BYTES, path);
  const withHeader = hasVolumeHeader(bytes);
  const start = withHeader ? VOLUME_HEADER_BYTES : 0;
  const station = withHeader ? bytes.toString("latin1", 20, 24) : "";
  const named = /^[A-Z][A-Z0-9]{3}$/.test(station) ? { station } : {};
  if (bytes.length <= start) throw new InputError("the file holds no message", path, "fetch it again");
  if (!startsRecord(bytes.subarray(start))) {
    return { records: [bytes.subarray(start)], ...named, hasVolumeHeader: withHeader, cutShort: false };
  }
  return { ...compressedRecords(bytes, start, path), ...named, hasVolumeHeader: withHeader };
}

function compressedRecords(
  bytes: Buffer,
  start: number,
  path: string,
): { records: readonly Buffer[]; cutShort: boolean } {
  const records: Buffer[] = [];
  let room = MAX_VOLUME_BYTES;
  let at = start;
  while (at + 8 <= bytes.length && records.length < MAX_RECORDS) {
    // The length of the last record of a scan is negative.
    const length = Math.abs(bytes.readInt32BE(at));
    const from = at + 4;
    if (length < 4 || from + length > bytes.length) return endedWithin(records, path);
    const where = `${path}, record ${records.length + 1}`;
    const unpacked = bunzip(bytes.subarray(from, from + length), room, where);
    room -= unpacked.length;
    records.push(unpacked);
    at = from + length;
  }
  return { records, cutShort: at < bytes.length };
}

/** A volume that is still being sent ends anywhere; its whole records count. */
function endedWithin(
  records: readonly Buffer[],
  path: string,
): { records: readonly Buffer[]; cutShort: true } {
  if (records.length > 0) return { records, cutShort: true };
  throw new InputError("the file is cut short within its first record", path, "fetch it again");
}
