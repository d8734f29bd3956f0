const SIGNATURE = Buffer.from("GCOL", "latin1");
const HEADER_BYTES = 16;
const OBJECT_HEADER_BYTES = 16;

/**
 * Whether every heap of variable-length text in a file can be walked to its end.
 *
 * The HDF5 library walks such a heap without asking whether it gets ahead: a free space of size 0 keeps it there
 * for ever, and nothing can stop it. So this runs before the first variable-length text of a file is read.
 *
 * @param bytes - the whole file
 * @see HDF5 File Format Specification, version 3.0, section III.E (The HDF Group)
 */
export function globalHeapsAreSound(bytes: Buffer): boolean {
  for (let at = bytes.indexOf(SIGNATURE); at >= 0; at = bytes.indexOf(SIGNATURE, at + 1)) {
    if (at + HEADER_BYTES > bytes.length) return false;
    // Anything else behind the four letters is data that happens to hold them: no library takes it for a heap.
    if (bytes[at + 4] !== 1) continue;
    if (!heapIsSound(bytes, at)) return false;
  }
  return true;
}

function heapIsSound(bytes: Buffer, start: number): boolean {
  const end = start + Number(bytes.readBigUInt64LE(start + 8));
  if (!(end <= bytes.length)) return false;
  let at = start + HEADER_BYTES;
  while (at + OBJECT_HEADER_BYTES <= end) {
    const index = bytes.readUInt16LE(at);
    const size = Number(bytes.readBigUInt64LE(at + 8));
    // Free space (index 0) counts its own header; an object does not, and is padded to eight bytes.
    const step = index === 0 ? size : OBJECT_HEADER_BYTES + Math.ceil(size / 8) * 8;
    if (step < OBJECT_HEADER_BYTES || !(at + step <= end)) return false;
    at += step;
  }
  return true;
}
