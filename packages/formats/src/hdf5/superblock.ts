/** Where a file that starts like HDF5 says that it ends. */
export interface Superblock {
  readonly version: number;
  /** Where the signature stands: 0, or after a block of the user's own at 512, 1024, 2048, … */
  readonly offset: number;
  /** Length that the whole file had when it was closed. */
  readonly endOfFile: number;
}

/** Bytes of a file's head that are enough to find its signature and its length. */
export const HEAD_BYTES = 4096;

const SIGNATURE = [0x89, 0x48, 0x44, 0x46, 0x0d, 0x0a, 0x1a, 0x0a];

/** Offset of the HDF5 signature within the head of a file, or undefined. */
export function signatureOffset(head: Uint8Array): number | undefined {
  for (let offset = 0; offset + SIGNATURE.length <= head.length; offset = offset === 0 ? 512 : offset * 2) {
    if (SIGNATURE.every((byte, i) => head[offset + i] === byte)) return offset;
  }
  return undefined;
}

/**
 * Reads the superblock, versions 0 to 3.
 *
 * @param head - the first bytes of a file, up to {@link HEAD_BYTES}
 * @returns undefined where it is no HDF5, or cut off within the superblock
 * @see HDF5 File Format Specification, version 3.0, section II.A (The HDF Group)
 */
export function readSuperblock(head: Uint8Array): Superblock | undefined {
  const offset = signatureOffset(head);
  if (offset === undefined) return undefined;
  const version = head[offset + 8];
  const early = version === 0 || version === 1;
  if (!early && version !== 2 && version !== 3) return undefined;
  const addressBytes = head[offset + (early ? 13 : 9)];
  if (addressBytes !== 4 && addressBytes !== 8) return undefined;
  const addresses = offset + (early ? (version === 0 ? 24 : 28) : 12);
  const view = new DataView(head.buffer, head.byteOffset, head.byteLength);
  const at = addresses + 2 * addressBytes;
  if (at + addressBytes > head.length) return undefined;
  const stored = addressBytes === 8 ? Number(view.getBigUint64(at, true)) : view.getUint32(at, true);
  // The stored addresses count from the base address, which is where the signature stands.
  const base =
    addressBytes === 8 ? Number(view.getBigUint64(addresses, true)) : view.getUint32(addresses, true);
  return { version, offset, endOfFile: base + stored };
}
