import { expect, test } from "vitest";
import { globalHeapsAreSound } from "./global-heap.ts";

/** A heap of one text and free space, from the HDF5 File Format Specification, version 3.0, section III.E. */
function heap(): Buffer {
  const bytes = Buffer.alloc(64 + 4096);
  bytes.write("GCOL", 64, "latin1");
  bytes[68] = 1;
  bytes.writeBigUInt64LE(4096n, 72);
  bytes.writeUInt16LE(1, 80);
  bytes.writeBigUInt64LE(9n, 88);
  bytes.write("H5rad 2.3", 96, "latin1");
  bytes.writeBigUInt64LE(4096n - 16n - 32n, 120);
  return bytes;
}

test("a heap that ends is sound, and so is a file without one", () => {
  expect(globalHeapsAreSound(heap())).toBe(true);
  expect(globalHeapsAreSound(Buffer.from("no heap here"))).toBe(true);
  expect(globalHeapsAreSound(Buffer.from("GCOL in a comment, not a heap"))).toBe(true);
});

test("a heap that stands still, or runs past its end, is not", () => {
  const standingStill = heap();
  standingStill.writeBigUInt64LE(0n, 120);
  expect(globalHeapsAreSound(standingStill)).toBe(false);

  const pastItsEnd = heap();
  pastItsEnd.writeBigUInt64LE(5000n, 88);
  expect(globalHeapsAreSound(pastItsEnd)).toBe(false);

  expect(globalHeapsAreSound(heap().subarray(0, 2000))).toBe(false);
});
