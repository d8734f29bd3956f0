import { closeSync, fstatSync, openSync, readFileSync, readSync, statSync } from "node:fs";
import { resolve } from "node:path";
import { constants, inflateSync } from "node:zlib";
import { InputError, type StoredValues } from "@rainreckon/core";
import type { Metadata } from "h5wasm/node";
import { globalHeapsAreSound } from "./global-heap.ts";
import { callLibrary, countFileReads, readBytes } from "./library.ts";
import { HEAD_BYTES, readSuperblock, signatureOffset } from "./superblock.ts";
import { decodeText } from "./text.ts";

/** Most elements that one array may hold; asked before anything is allocated. */
export const MAX_ELEMENTS = 64_000_000;
const MAX_ATTRIBUTE_BYTES = 16_000_000;
const MAX_TEXT_BYTES = 1_000_000;
/** Where variable-length texts are met, the file is read once as a whole to see that they end. */
const MAX_BYTES_WITH_HEAPS = 1_000_000_000;

const NUMBER_CLASS = 0;
const FLOAT_CLASS = 1;
const STRING_CLASS = 3;
const NOTHING_THERE = -1;
const GROUP_OBJECT = 0;
const ARRAY_OBJECT = 1;

/** One value is a number or a text; several are an array, in storage order. */
export type AttributeValue = number | string | Float64Array | readonly string[];

/** Names of the stored types that arrays are read from. */
export type ElementType = "uint8" | "uint16" | "int16" | "int32" | "float32" | "float64";

/** What is known of an array without reading it. */
export interface DatasetShape {
  readonly shape: readonly number[];
  readonly elementCount: number;
  readonly type: ElementType;
}

/**
 * An HDF5 file open for reading. Objects are named by absolute paths, "/" being the root.
 *
 * Every method throws `InputError` naming file and object where the file is damaged there.
 */
export interface Hdf5File {
  /** As it was handed in. */
  readonly path: string;
  /** Names of what a group holds, or undefined where there is no such group. */
  children(group: string): readonly string[] | undefined;
  /** Names of the attributes of a group or dataset that exists; remembered, so that asking for absent ones is free. */
  attributeNames(object: string): ReadonlySet<string>;
  /** An attribute's value, or undefined where the object or the attribute is absent. */
  attribute(object: string, name: string): AttributeValue | undefined;
  /** Whether a name is a group or an array; undefined where there is neither. */
  kindOf(object: string): "group" | "array" | undefined;
  /** Shape of an array of any numbers, or undefined where nothing has that name or it holds no numbers. */
  numericShape(dataset: string): readonly number[] | undefined;
  /** Name of the type that an array is stored in, "int8" say; undefined where there is no array of that name. */
  elementTypeName(dataset: string): string | undefined;
  /** An array of whole or floating numbers of any width as float64. Throws `InputError` as {@link Hdf5File.read}. */
  readNumbers(dataset: string): Float64Array;
  /** Shape and type of an array, or undefined where there is none of that name. */
  describe(dataset: string): DatasetShape | undefined;
  /** The whole array in storage order, a copy of its own. Throws `InputError` where it is absent or fails to decode. */
  read(dataset: string): StoredValues;
  /** One layer of an array of two dimensions or more, by the first; what {@link Hdf5File.read} says holds here too. */
  readLayer(dataset: string, index: number): StoredValues;
  /** Closes the file; a second time does nothing. */
  close(): void;
}

function product(lengths: readonly number[]): number {
  return lengths.reduce((sum, length) => sum * length, 1);
}

/**
 * Opens an HDF5 file for reading; nothing but this path is opened, whatever links the file holds.
 *
 * @throws InputError where the file cannot be opened, is no HDF5, is cut short, or has a damaged head
 */
export function openHdf5(path: string): Hdf5File {
  const full = resolve(path);
  checkHead(path, full);
  const id = callLibrary(full, (library) => library.open(full, library.H5F_ACC_RDONLY, false, -1, -1));
  if (id < 0n) throw damaged("its head cannot be read", path);
  return new OpenFile(path, full, id);
}

/** Reads the first bytes of a file, at most `byteCount`. @throws InputError where the file cannot be opened */
export function readHead(path: string, byteCount: number = HEAD_BYTES): Uint8Array {
  return readStart(path, path, byteCount).head;
}

function readStart(path: string, full: string, byteCount: number): { head: Uint8Array; size: number } {
  let descriptor: number | undefined;
  try {
    descriptor = openSync(full, "r");
    const head = new Uint8Array(byteCount);
    const length = readSync(descriptor, head, 0, byteCount, 0);
    return { head: head.subarray(0, length), size: fstatSync(descriptor).size };
  } catch (error) {
    const code = error instanceof Error && "code" in error ? String(error.code) : "unknown fault";
    throw new InputError(`cannot be opened (${code})`, path, "check that the file exists and may be read", {
      cause: error,
    });
  } finally {
    if (descriptor !== undefined) closeSync(descriptor);
  }
}

/** Tells what is wrong before the library, which would only say no. */
function checkHead(path: string, full: string): void {
  const { head, size } = readStart(path, full, HEAD_BYTES);
  if (size === 0) throw new InputError("the file is empty", path, "fetch it again");
  if (signatureOffset(head) === undefined) {
    throw new InputError("not an HDF5 file", path, "leave it out, or fetch it again");
  }
  const superblock = readSuperblock(head);
  if (superblock === undefined) {
    if (size < HEAD_BYTES) throw truncated(path, size);
    throw damaged("its head cannot be read", path);
  }
  if (size < superblock.endOfFile) throw truncated(path, size, superblock.endOfFile);
}

function truncated(path: string, size: number, whole?: number): InputError {
  const of = whole === undefined ? "" : ` of ${whole}`;
  return new InputError(`the file is cut short: ${size}${of} bytes are there`, path, "fetch it again");
}

function damaged(what: string, where: string, cause?: unknown): InputError {
  return new InputError(`the file is damaged: ${what}`, where, "fetch it again", { cause });
}

class OpenFile implements Hdf5File {
  readonly path: string;
  readonly #full: string;
  readonly #id: bigint;
  readonly #attributeNames = new Map<string, ReadonlySet<string>>();
  readonly #datasets = new Map<string, Metadata>();
  #heapsChecked = false;
  #open = true;

  constructor(path: string, full: string, id: bigint) {
    this.path = path;
    this.#full = full;
    this.#id = id;
  }

  children(group: string): readonly string[] | undefined {
    this.#mustBeOpen();
    try {
      return callLibrary(this.#full, (library) => library.get_names(this.#id, group, false));
    } catch (error) {
      if (this.#isAbsent(group)) return undefined;
      throw damaged("this group cannot be listed", this.#at(group), error);
    }
  }

  attributeNames(object: string): ReadonlySet<string> {
    this.#mustBeOpen();
    const known = this.#attributeNames.get(object);
    if (known !== undefined) return known;
    try {
      const names = callLibrary(this.#full, (library) => library.get_attribute_names(this.#id, object));
      const set = new Set(names);
      this.#attributeNames.set(object, set);
      return set;
    } catch (error) {
      throw damaged("the attributes here cannot be listed", this.#at(object), error);
    }
  }

  attribute(object: string, name: string): AttributeValue | undefined {
    this.#mustBeOpen();
    if (this.#attributeNames.get(object)?.has(name) === false) return undefined;
    let metadata: Metadata;
    try {
      metadata = callLibrary(this.#full, (library) => library.get_attribute_metadata(this.#id, object, name));
    } catch (error) {
      // Listing costs more than asking, so it waits for the first miss, and then answers all later ones.
      if (this.#isAbsent(object) || !this.attributeNames(object).has(name)) return undefined;
      throw damaged(`the attribute ${name} cannot be read`, this.#at(object), error);
    }
    return this.#attributeValue(object, name, metadata);
  }

  describe(dataset: string): DatasetShape | undefined {
    const metadata = this.#datasetMetadata(dataset);
    return metadata === undefined ? undefined : this.#checkedShape(dataset, metadata);
  }

  kindOf(object: string): "group" | "array" | undefined {
    this.#mustBeOpen();
    const code = callLibrary(this.#full, (library) => library.get_type(this.#id, object));
    if (code === GROUP_OBJECT) return "group";
    return code === ARRAY_OBJECT ? "array" : undefined;
  }

  numericShape(dataset: string): readonly number[] | undefined {
    const metadata = this.#datasetMetadata(dataset);
    if (metadata === undefined || numberReader(metadata) === undefined) return undefined;
    return metadata.shape ?? undefined;
  }

  elementTypeName(dataset: string): string | undefined {
    const metadata = this.#datasetMetadata(dataset);
    return metadata === undefined ? undefined : typeName(metadata);
  }

  readNumbers(dataset: string): Float64Array {
    const metadata = this.#datasetMetadata(dataset);
    const where = this.#at(dataset);
    if (metadata === undefined) {
      throw new InputError("there is no such array", where, "ask for one that the file holds");
    }
    const { elementCount } = this.#boundedShape(dataset, metadata);
    if (numberReader(metadata) === undefined) {
      throw new InputError(
        `the array holds ${typeName(metadata)}, not numbers`,
        where,
        "store it as numbers",
      );
    }
    const byteCount = elementCount * metadata.size;
    const bytes = this.#arrayBytes(dataset, byteCount);
    this.#mustBeUnpacked(dataset, metadata, bytes);
    const values = numbers(bytes, metadata, where);
    if (metadata.chunks !== null && values.every((value) => value === values[0])) {
      this.#mustBeStored(dataset, byteCount);
    }
    return values;
  }

  read(dataset: string): StoredValues {
    const metadata = this.#datasetMetadata(dataset);
    if (metadata === undefined) {
      throw new InputError("there is no such array", this.#at(dataset), "ask for one that the file holds");
    }
    const { elementCount, type } = this.#checkedShape(dataset, metadata);
    const byteCount = elementCount * metadata.size;
    const bytes = this.#arrayBytes(dataset, byteCount);
    this.#mustBeUnpacked(dataset, metadata, bytes);
    const values = typedArray(type, bytes.buffer);
    if (metadata.chunks !== null && values.every((value) => value === values[0])) {
      this.#mustBeStored(dataset, byteCount);
    }
    return values;
  }

  readLayer(dataset: string, index: number): StoredValues {
    const metadata = this.#datasetMetadata(dataset);
    if (metadata === undefined) {
      throw new InputError("there is no such array", this.#at(dataset), "ask for one that the file holds");
    }
    const [layers = 0, ...layer] = metadata.shape ?? [];
    if (layer.length === 0 || !(Number.isInteger(index) && index >= 0 && index < layers))
      throw new RangeError(`there is no layer ${index} in ${dataset}: it has ${layers}`);
    const { type } = this.#checkedShape(dataset, { ...metadata, shape: layer, total_size: product(layer) });
    const bytes = this.#arrayBytes(dataset, product(layer) * metadata.size, {
      count: [1, ...layer].map(BigInt),
      offset: [index, ...layer.map(() => 0)].map(BigInt),
    });
    this.#mustBeUnpacked(dataset, metadata, bytes);
    return typedArray(type, bytes.buffer);
  }

  /**
   * Where the index of an array's chunks is lost, or they were never written, the library hands out the fill value
   * without a word: a sweep of echo would become one of none. The first read has brought the index into memory, so
   * a second one goes to the file for the chunks alone, and not at all where there are none.
   */
  #mustBeStored(dataset: string, byteCount: number): void {
    if (countFileReads(() => this.#arrayBytes(dataset, byteCount)) > 0) return;
    throw damaged("nothing of this array is stored", this.#at(dataset));
  }

  /**
   * A damaged index may say of a chunk that it was never packed: its packed bytes then come back as values, without a
   * word. Bytes that unpack without a fault are no measurement.
   */
  #mustBeUnpacked(dataset: string, metadata: Metadata, bytes: Uint8Array): void {
    if (metadata.chunks === null || !startsZlib(bytes)) return;
    try {
      // What does not pack well is longer packed, so that its end may be missing.
      inflateSync(bytes, {
        finishFlush: constants.Z_SYNC_FLUSH,
        maxOutputLength: Math.max(bytes.length * 2, 1024),
      });
    } catch {
      return;
    }
    throw damaged("this array comes back packed", this.#at(dataset));
  }

  /** @param part - which elements of it, by dimension; all where left out */
  #arrayBytes(
    dataset: string,
    byteCount: number,
    part?: { readonly count: bigint[]; readonly offset: bigint[] },
  ): Uint8Array<ArrayBuffer> {
    const [count, offset] = [part?.count ?? null, part?.offset ?? null];
    const strides = part?.count.map(() => 1n) ?? null;
    let bytes: Uint8Array<ArrayBuffer> | undefined;
    try {
      bytes = readBytes(this.#full, byteCount, (library, address) =>
        library.get_dataset_data(this.#id, dataset, count, offset, strides, BigInt(address)),
      );
    } catch (error) {
      if (error instanceof RangeError) throw error;
      throw damaged("this array cannot be decoded", this.#at(dataset), error);
    }
    if (bytes === undefined) throw damaged("this array cannot be decoded", this.#at(dataset));
    return bytes;
  }

  close(): void {
    if (!this.#open) return;
    this.#open = false;
    callLibrary(this.#full, (library) => library.close_file(this.#id));
  }

  #datasetMetadata(dataset: string): Metadata | undefined {
    this.#mustBeOpen();
    const known = this.#datasets.get(dataset);
    if (known !== undefined) return known;
    try {
      const metadata = callLibrary(this.#full, (library) => library.get_dataset_metadata(this.#id, dataset));
      this.#datasets.set(dataset, metadata);
      return metadata;
    } catch (error) {
      if (this.#isAbsent(dataset)) return undefined;
      throw damaged("this array cannot be opened", this.#at(dataset), error);
    }
  }

  #checkedShape(dataset: string, metadata: Metadata): DatasetShape {
    const bounded = this.#boundedShape(dataset, metadata);
    const type = elementType(metadata);
    if (type === undefined) {
      throw new InputError(
        `the array holds ${typeName(metadata)}, which is not read`,
        this.#at(dataset),
        "store it as uint8, uint16, int16, int32, float32 or float64",
      );
    }
    return { ...bounded, type };
  }

  /** Size of an array, known to be small enough before anything is allocated. */
  #boundedShape(dataset: string, metadata: Metadata): Omit<DatasetShape, "type"> {
    const where = this.#at(dataset);
    const { shape, total_size: elementCount } = metadata;
    if (shape === null) throw damaged("this array has no shape", where);
    const chunkElements = (metadata.chunks ?? []).reduce((product, length) => product * length, 1);
    // The comparisons are turned round so that NaN fails them too.
    if (!(elementCount <= MAX_ELEMENTS) || !(chunkElements <= MAX_ELEMENTS)) {
      const size = Math.max(elementCount, chunkElements);
      throw new InputError(
        `an array of ${size} elements is larger than the ${MAX_ELEMENTS} that are read`,
        where,
        "check the file; no radar sweep is that large",
      );
    }
    if (metadata.virtual_sources !== undefined) {
      throw new InputError("the array's data lie in other files", where, "join them into one file");
    }
    return { shape, elementCount };
  }

  #attributeValue(object: string, name: string, metadata: Metadata): AttributeValue {
    const where = `${this.#at(object)}, attribute ${name}`;
    const byteCount = metadata.size * metadata.total_size;
    if (metadata.shape === null) throw damaged("this attribute has no shape", where);
    if (!(metadata.size > 0 && byteCount >= 0 && byteCount <= MAX_ATTRIBUTE_BYTES)) {
      throw damaged(`this attribute claims ${byteCount} bytes`, where);
    }
    const isText = metadata.type === STRING_CLASS;
    if (!isText && numberReader(metadata) === undefined) {
      throw new InputError(
        `the attribute holds ${typeName(metadata)}, which is not read`,
        where,
        "store it as a number or a text",
      );
    }
    if (isText && metadata.vlen) return this.#variableText(object, name, metadata, where);
    const bytes = this.#attributeBytes(object, name, byteCount, where);
    const values = isText ? fixedTexts(bytes, metadata.size) : numbers(bytes, metadata, where);
    return values.length === 1 ? (values[0] as number | string) : values;
  }

  #attributeBytes(object: string, name: string, byteCount: number, where: string): Uint8Array {
    const bytes = readBytes(this.#full, byteCount, (library, address) =>
      library.get_attribute_data(this.#id, object, name, BigInt(address)),
    );
    if (bytes === undefined) throw damaged("this attribute cannot be decoded", where);
    return bytes;
  }

  #variableText(object: string, name: string, metadata: Metadata, where: string): string | readonly string[] {
    if (!this.#heapsChecked) {
      if (statSync(this.#full).size > MAX_BYTES_WITH_HEAPS) {
        throw new InputError(
          "the file is too large for variable-length texts",
          this.path,
          "store fixed-length texts",
        );
      }
      if (!globalHeapsAreSound(readFileSync(this.#full))) {
        throw damaged("its variable-length texts cannot be read", this.path);
      }
      this.#heapsChecked = true;
    }
    const texts: string[] = [];
    const pointers = readBytes(this.#full, metadata.size * metadata.total_size, (library, address) => {
      const status = library.get_attribute_data(this.#id, object, name, BigInt(address));
      if (status < 0) return status;
      const view = new DataView(library.HEAPU8.buffer, address, 4 * metadata.total_size);
      for (let i = 0; i < metadata.total_size; i++) {
        const text = view.getUint32(4 * i, true);
        texts.push(text === 0 ? "" : decodeText(library.HEAPU8.subarray(text, text + MAX_TEXT_BYTES)));
      }
      return library.reclaim_vlen_memory(this.#id, object, name, BigInt(address));
    });
    if (pointers === undefined) throw damaged("this attribute cannot be decoded", where);
    return texts.length === 1 ? (texts[0] as string) : texts;
  }

  #isAbsent(object: string): boolean {
    return callLibrary(this.#full, (library) => library.get_type(this.#id, object)) === NOTHING_THERE;
  }

  #at(object: string): string {
    return `${this.path}, ${object.replace(/^\//, "") || "root"}`;
  }

  #mustBeOpen(): void {
    if (!this.#open) throw new RangeError(`${this.path} is closed already`);
  }
}

/** The two bytes that begin a zlib stream (RFC 1950, section 2.2): deflate, and a check that 31 divides them. */
function startsZlib(bytes: Uint8Array): boolean {
  const [method, flags] = bytes;
  if (method === undefined || flags === undefined) return false;
  return (method & 0x0f) === 8 && (method * 256 + flags) % 31 === 0;
}

function elementType(metadata: Metadata): ElementType | undefined {
  const name = typeName(metadata);
  switch (name) {
    case "uint8":
    case "uint16":
    case "int16":
    case "int32":
    case "float32":
    case "float64":
      return name;
    default:
      return undefined;
  }
}

const CLASS_NAMES = [
  "integers",
  "floats",
  "times",
  "texts",
  "bit fields",
  "opaque bytes",
  "records",
  "references",
  "enumerations",
  "variable-length lists",
  "arrays",
]; // prettier-ignore

function typeName(metadata: Metadata): string {
  if (metadata.type === NUMBER_CLASS) return `${metadata.signed ? "int" : "uint"}${8 * metadata.size}`;
  if (metadata.type === FLOAT_CLASS) return `float${8 * metadata.size}`;
  return CLASS_NAMES[metadata.type] ?? "values of an unknown kind";
}

function typedArray(type: ElementType, buffer: ArrayBuffer): StoredValues {
  switch (type) {
    case "uint8":
      return new Uint8Array(buffer);
    case "uint16":
      return new Uint16Array(buffer);
    case "int16":
      return new Int16Array(buffer);
    case "int32":
      return new Int32Array(buffer);
    case "float32":
      return new Float32Array(buffer);
    case "float64":
      return new Float64Array(buffer);
  }
}

type NumberReader = (view: DataView, at: number) => number | bigint;

const NUMBER_READERS: Readonly<Record<string, NumberReader>> = {
  int8: (view, at) => view.getInt8(at),
  uint8: (view, at) => view.getUint8(at),
  int16: (view, at) => view.getInt16(at, true),
  uint16: (view, at) => view.getUint16(at, true),
  int32: (view, at) => view.getInt32(at, true),
  uint32: (view, at) => view.getUint32(at, true),
  int64: (view, at) => view.getBigInt64(at, true),
  uint64: (view, at) => view.getBigUint64(at, true),
  float32: (view, at) => view.getFloat32(at, true),
  float64: (view, at) => view.getFloat64(at, true),
};

function numberReader(metadata: Metadata): NumberReader | undefined {
  return NUMBER_READERS[typeName(metadata)];
}

function numbers(bytes: Uint8Array, metadata: Metadata, where: string): Float64Array {
  const read = numberReader(metadata) as NumberReader;
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const values = new Float64Array(metadata.total_size);
  for (let i = 0; i < values.length; i++) {
    const value = read(view, i * metadata.size);
    if (typeof value === "bigint" && !Number.isSafeInteger(Number(value))) {
      throw new InputError(
        `${value} is too large a whole number to be kept exactly`,
        where,
        "check the file; no value that is read here is that large",
      );
    }
    values[i] = Number(value);
  }
  return values;
}

function fixedTexts(bytes: Uint8Array, size: number): readonly string[] {
  const texts: string[] = [];
  for (let at = 0; at + size <= bytes.length; at += size) {
    texts.push(decodeText(bytes.subarray(at, at + size)));
  }
  return texts;
}
