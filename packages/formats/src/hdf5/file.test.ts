import { existsSync, readdirSync, readFileSync, writeFileSync } from "node:fs";
import { inflateSync } from "node:zlib";
import { InputError } from "@rainreckon/core";
import h5wasm from "h5wasm/node";
import { afterAll, beforeAll, expect, test } from "vitest";
import { MOMENT, oneSweep, removeTemporary, temporaryPath, writeOdim } from "../../test/odim-fixture.ts";
import { openHdf5 } from "./file.ts";
import { hdf5Ready } from "./library.ts";

beforeAll(hdf5Ready);
afterAll(removeTemporary);

/** The error that a call throws, which must be one that the user can mend. */
function fault(call: () => unknown): InputError {
  try {
    call();
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error("nothing was thrown");
}

function writeWith(fill: (file: InstanceType<typeof h5wasm.File>) => void): string {
  const path = temporaryPath("plain.h5");
  const file = new h5wasm.File(path, "w", { libver: ["earliest", "v110"] });
  fill(file);
  file.close();
  return path;
}

/** Where the deflated array lies in the file: found by inflating, not by the reader under test. */
function deflatedAt(bytes: Buffer, values: Uint8Array): number {
  for (let at = bytes.indexOf(0x78); at >= 0; at = bytes.indexOf(0x78, at + 1)) {
    try {
      if (inflateSync(bytes.subarray(at)).equals(values)) return at;
    } catch {
      // Not the start of a stream.
    }
  }
  throw new Error("no deflated array found");
}

test("a chunk that fails to decode throws; what an earlier read left in memory is not returned", () => {
  const values = Uint8Array.from({ length: 4000 }, (_, i) => (i * i * 31 + (i >> 3)) & 255);
  const good = writeOdim(oneSweep({}, { values, shape: [40, 100] }));
  const bytes = readFileSync(good);
  const start = deflatedAt(bytes, values);
  bytes.fill(0xff, start + 40, start + 60);
  const bad = temporaryPath("bad-chunk.h5");
  writeFileSync(bad, bytes);

  for (let round = 0; round < 3; round++) {
    const file = openHdf5(good);
    expect(file.read("/dataset1/data1/data")).toEqual(values);
    file.close();
    const broken = openHdf5(bad);
    const error = fault(() => broken.read("/dataset1/data1/data"));
    expect(error.line).toBe(
      `${bad}, dataset1/data1/data: the file is damaged: this array cannot be decoded; fetch it again`,
    );
    broken.close();
  }
});

test("an array that was never written is refused, not handed out as the fill value", () => {
  const path = writeOdim(oneSweep());
  // The dataset's chunks are found through a version 1 B-tree of node type 1 (HDF5 File Format Specification,
  // section III.A.1): with "entries used" at 0 the library finds none.
  const bytes = readFileSync(path);
  for (let at = bytes.indexOf("TREE"); at >= 0; at = bytes.indexOf("TREE", at + 1)) {
    if (bytes[at + 4] === 1) bytes.writeUInt16LE(0, at + 6);
  }
  writeFileSync(path, bytes);
  const file = openHdf5(path);
  expect(fault(() => file.read("/dataset1/data1/data")).what).toBe(
    "the file is damaged: nothing of this array is stored",
  );
  file.close();
});

test("an array of one value throughout is read like any other", () => {
  const dry = new Uint8Array(MOMENT.values.length);
  const file = openHdf5(writeOdim(oneSweep({}, { values: dry })));
  expect(file.read("/dataset1/data1/data")).toEqual(dry);
  expect(file.read("/dataset1/data1/data")).toEqual(dry);
  file.close();
});

test.each([
  ["uint8", Uint8Array.of(0, 255)],
  ["uint16", Uint16Array.of(0, 65535)],
  ["int16", Int16Array.of(-32768, 32767)],
  ["int32", Int32Array.of(-2147483648, 2147483647)],
  ["float32", Float32Array.of(-1.5, Number.NaN)],
  ["float64", Float64Array.of(-1.5, Number.POSITIVE_INFINITY)],
] as const)("%s arrays come back as they are", (type, data) => {
  const path = writeWith((file) => file.create_dataset({ name: "a", data, shape: [1, 2] }));
  const file = openHdf5(path);
  expect(file.describe("/a")).toEqual({ shape: [1, 2], elementCount: 2, type });
  expect(file.read("/a")).toEqual(data);
  file.close();
});

test("types that are not read are named", () => {
  const path = writeWith((file) => {
    file.create_dataset({ name: "long", data: BigInt64Array.of(1n) });
    file.create_dataset({ name: "text", data: ["a"], dtype: "S4" });
  });
  const file = openHdf5(path);
  expect(fault(() => file.read("/long")).what).toBe("the array holds int64, which is not read");
  expect(fault(() => file.describe("/text")).what).toBe("the array holds texts, which is not read");
  file.close();
});

test("an array is bounded before it is read", () => {
  const path = writeWith((file) =>
    file.create_dataset({
      name: "huge",
      data: new Uint8Array(4),
      shape: [2, 2],
      maxshape: [null, null],
      chunks: [2, 2],
    }),
  );
  const grow = new h5wasm.File(path, "a");
  (grow.get("huge") as InstanceType<typeof h5wasm.Dataset>).resize([90_000, 90_000]);
  grow.close();
  const file = openHdf5(path);
  const error = fault(() => file.read("/huge"));
  expect(error.what).toBe("an array of 8100000000 elements is larger than the 64000000 that are read");
  expect(error.where).toBe(`${path}, huge`);
  file.close();
});

test("attributes: numbers of any width, texts trimmed, lists, and what is absent", () => {
  const path = writeWith((file) => {
    file.create_attribute("long", 9007199254740991n as unknown as number, null, "<q");
    file.create_attribute("short", -7, null, "<h");
    file.create_attribute("one", [3.5], [1], "<d");
    file.create_attribute("list", [1, 2, 3], null, "<f");
    file.create_attribute("fixed", " frave \0", null, "S12");
    file.create_attribute("variable", "Île", null, "S");
    file.create_attribute("texts", ["a ", "bc"], null, "S3");
    file.create_attribute("beyond", 9007199254740993n as unknown as number, null, "<q");
  });
  const file = openHdf5(path);
  const read = (name: string) => file.attribute("/", name);
  expect(read("long")).toBe(9007199254740991);
  expect(read("short")).toBe(-7);
  expect(read("one")).toBe(3.5);
  expect(read("list")).toEqual(Float64Array.of(1, 2, 3));
  expect(read("fixed")).toBe("frave");
  expect(read("variable")).toBe("Île");
  expect(read("texts")).toEqual(["a", "bc"]);
  expect(read("none")).toBeUndefined();
  expect(file.attribute("/no/such/group", "none")).toBeUndefined();
  expect(file.children("/no/such/group")).toBeUndefined();
  expect(file.describe("/no/such/array")).toBeUndefined();
  expect(fault(() => read("beyond")).what).toContain("9007199254740993 is too large a whole number");
  file.close();
  file.close();
  expect(() => read("long")).toThrow(RangeError);
});

test("Latin-1 in a text that claims to be UTF-8 is read, not refused", () => {
  const path = writeWith((file) => file.create_attribute("place", "Xle", null, "S3"));
  const bytes = readFileSync(path);
  bytes[bytes.lastIndexOf("Xle")] = 0xce;
  writeFileSync(path, bytes);
  const file = openHdf5(path);
  expect(file.attribute("/", "place")).toBe("Île");
  file.close();
});

test("a link to another file is not followed", () => {
  const other = writeOdim(oneSweep());
  const path = writeWith((file) => {
    file.create_external_link(other, "/dataset1", "dataset1");
  });
  const file = openHdf5(path);
  expect(file.children("/")).toEqual(["dataset1"]);
  expect(fault(() => file.read("/dataset1/data1/data")).where).toBe(`${path}, dataset1/data1/data`);
  expect(fault(() => file.attribute("/dataset1/what", "startdate")).where).toBe(`${path}, dataset1/what`);
  file.close();
});

test("what is no HDF5, cut short, empty or not there is told apart", () => {
  const whole = readFileSync(writeOdim(oneSweep()));
  const bad = (name: string, bytes: Uint8Array | string) => {
    const path = temporaryPath(name);
    writeFileSync(path, bytes);
    return fault(() => openHdf5(path)).what;
  };
  expect(bad("empty.h5", "")).toBe("the file is empty");
  expect(bad("text.h5", "time,value\n")).toBe("not an HDF5 file");
  expect(bad("cut.h5", whole.subarray(0, 3000))).toBe(
    `the file is cut short: 3000 of ${whole.length} bytes are there`,
  );
  expect(bad("head.h5", whole.subarray(0, 20))).toBe("the file is cut short: 20 bytes are there");
  expect(fault(() => openHdf5("/no/such/file.h5")).what).toBe("cannot be opened (ENOENT)");
});

test("a heap of texts that never ends is refused before the library walks it", () => {
  const path = writeWith((file) => file.create_attribute("version", "H5rad 2.3", null, "S"));
  const bytes = readFileSync(path);
  const heap = bytes.indexOf("GCOL");
  // The free space behind the one text, of 16 + 16 bytes: it would be walked in steps of 0.
  bytes.writeBigUInt64LE(0n, heap + 16 + 32 + 8);
  writeFileSync(path, bytes);
  const file = openHdf5(path);
  expect(fault(() => file.attribute("/", "version")).what).toBe(
    "the file is damaged: its variable-length texts cannot be read",
  );
  file.close();
});

// Descriptors are counted where the system shows them; elsewhere only the errors are looked at.
const DESCRIPTORS = "/proc/self/fd";

test("thousands of bad opens and absent names leak no descriptor and keep the library going", () => {
  const whole = readFileSync(writeOdim(oneSweep()));
  const bad = temporaryPath("bad.h5");
  const damagedHead = Buffer.from(whole);
  damagedHead.fill(0xff, 24, 96);
  const good = writeOdim(oneSweep());
  const descriptors = () => (existsSync(DESCRIPTORS) ? readdirSync(DESCRIPTORS).length : 0);
  const before = descriptors();
  for (let i = 0; i < 300; i++) {
    writeFileSync(bad, i % 2 === 0 ? whole.subarray(0, 100 + 7 * i) : damagedHead);
    expect(fault(() => openHdf5(bad)).where).toBe(bad);
  }
  expect(descriptors()).toBe(before);

  // Each of these throws inside the library; some 15,000 of them used up its stack before the stack was kept.
  const file = openHdf5(good);
  for (let i = 0; i < 17_000; i++) file.describe("/none");
  expect(file.read("/dataset1/data1/data")).toEqual(MOMENT.values);
  file.close();
  expect(descriptors()).toBe(before);
});

test("reading and closing a file many times keeps memory flat", async () => {
  const values = new Uint8Array(500_000).map((_, i) => (i * 7) & 255);
  const path = writeOdim(oneSweep({}, { values, shape: [1000, 500] }));
  const library = await h5wasm.ready;
  const readTimes = (times: number) => {
    for (let i = 0; i < times; i++) {
      const file = openHdf5(path);
      file.read("/dataset1/data1/data");
      file.close();
    }
  };
  readTimes(20);
  const bytes = library.HEAPU8.length;
  // 200 arrays of 500,000 bytes are 100 MB: a leak would show.
  readTimes(200);
  expect(library.HEAPU8.length).toBe(bytes);
});
