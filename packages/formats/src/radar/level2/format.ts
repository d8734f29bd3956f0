import { constants, gunzipSync } from "node:zlib";
import type { ScanFormat } from "../scan-file.ts";
import { LEVEL2_NAME, openLevel2 } from "./level2-file.ts";
import { hasVolumeHeader, isBzip2, isGzip, startsRecord } from "./records.ts";

/** Archive Level II of interface control documents 2620002 and 2620010: messages 1 and 31. */
export const level2Format: ScanFormat = {
  name: LEVEL2_NAME,
  recognise: (head) =>
    hasVolumeHeader(head) ||
    startsRecord(head) ||
    isBzip2(head) ||
    (isGzip(head) && hasVolumeHeader(startOfGzip(head))),
  open: openLevel2,
};

/** What the first bytes of a gzip file unpack to; nothing where they are damaged. */
function startOfGzip(head: Uint8Array): Uint8Array {
  try {
    // The head ends within the stream, which only a flush that asks for no end can live with.
    return gunzipSync(head, { finishFlush: constants.Z_SYNC_FLUSH, maxOutputLength: 10_000_000 });
  } catch {
    return new Uint8Array();
  }
}
