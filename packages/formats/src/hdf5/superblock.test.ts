import { expect, test } from "vitest";
import { readSuperblock, signatureOffset } from "./superblock.ts";

// Laid out by hand from the HDF5 File Format Specification, version 3.0, section II.A (The HDF Group).
const SIGNATURE = [0x89, 0x48, 0x44, 0x46, 0x0d, 0x0a, 0x1a, 0x0a];
const address = (value: number) => [value & 255, value >> 8, 0, 0, 0, 0, 0, 0];
const UNDEFINED_ADDRESS = [255, 255, 255, 255, 255, 255, 255, 255];
const VERSION_0 = [
  ...SIGNATURE,
  ...[0, 0, 0, 0, 0, 8, 8, 0],
  ...[4, 0, 16, 0, 0, 0, 0, 0],
  ...address(0),
  ...UNDEFINED_ADDRESS,
  ...address(2048),
  ...UNDEFINED_ADDRESS,
];
const VERSION_2 = [
  ...SIGNATURE,
  ...[2, 8, 8, 0],
  ...address(512),
  ...UNDEFINED_ADDRESS,
  ...address(1000),
  ...address(48),
];

test("version 0 and version 2 say where the file ends", () => {
  expect(readSuperblock(Uint8Array.from(VERSION_0))).toEqual({ version: 0, offset: 0, endOfFile: 2048 });
  const behindUserBlock = Uint8Array.from([...new Array(512).fill(0x20), ...VERSION_2]);
  expect(readSuperblock(behindUserBlock)).toEqual({ version: 2, offset: 512, endOfFile: 1512 });
});

test("what is no HDF5, of no known version, or cut off within the head has no superblock", () => {
  expect(signatureOffset(Uint8Array.from([0x43, 0x44, 0x46, 1]))).toBeUndefined();
  expect(readSuperblock(Uint8Array.from(VERSION_0.with(8, 9)))).toBeUndefined();
  expect(readSuperblock(Uint8Array.from(VERSION_0.slice(0, 40)))).toBeUndefined();
});
