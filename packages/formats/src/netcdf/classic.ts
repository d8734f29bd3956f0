import { readFileSync, statSync } from "node:fs";
import { InputError, type StoredValues } from "@rainreckon/core";
import type { AttributeValue } from "../hdf5/index.ts";
import {
  type ClassicHeader,
  type ClassicType,
  type ClassicVariable,
  classicHeader,
  runBytes,
} from "./classic-header.ts";
import { MAX_VARIABLE_ELEMENTS, type NetcdfFile } from "./netcdf-file.ts";
import { asUnsigned } from "./unsigned.ts";

const MAX_FILE_BYTES = 1_000_000_000;

/** What classic NetCDF stores numbers in. */
type ClassicValues = Int8Array<ArrayBuffer> | Exclude<StoredValues, Uint8Array | Uint16Array>;

/**
 * Opens a NetCDF classic file, version 1 or 2 (64-bit offsets).
 *
 * @throws InputError where it is damaged, cut short or no classic NetCDF
 * @see The NetCDF Classic Format Specification (Unidata)
 */
export function openClassic(path: string): NetcdfFile {
  const bytes = readWhole(path);
  let header: ClassicHeader;
  try {
    header = classicHeader(bytes);
  } catch (cause) {
    if (!(cause instanceof RangeError)) throw cause;
    throw damaged("its head cannot be read", path, cause);
  }
  return new Classic(path, bytes, header);
}

function readWhole(path: string): Buffer {
  try {
    if (statSync(path).size <= MAX_FILE_BYTES) return readFileSync(path);
  } catch (cause) {
    throw new InputError("cannot be opened", path, "check that the file exists and may be read", { cause });
  }
  throw new InputError("the file is larger than 1 GB", path, "store it as NetCDF-4");
}

class Classic implements NetcdfFile {
  readonly path: string;
  readonly kind = "NetCDF-3";
  readonly #bytes: Buffer;
  readonly #header: ClassicHeader;

  constructor(path: string, bytes: Buffer, header: ClassicHeader) {
    this.path = path;
    this.#bytes = bytes;
    this.#header = header;
  }

  variables(group: string): readonly string[] {
    return group === "" ? [...this.#header.variables.keys()] : [];
  }

  groups(): readonly string[] {
    return [];
  }

  shapeOf(variable: string): readonly number[] | undefined {
    const found = this.#header.variables.get(variable);
    return found === undefined || found.type === "char" ? undefined : found.shape;
  }

  attribute(object: string, name: string): AttributeValue | undefined {
    const attributes =
      object === "" ? this.#header.attributes : this.#header.variables.get(object)?.attributes;
    const value = attributes?.get(name);
    return value instanceof Float64Array && value.length === 1 ? value[0] : value;
  }

  numbers(variable: string): Float64Array {
    return Float64Array.from(this.#read(variable));
  }

  stored(variable: string): StoredValues {
    const unsigned = this.attribute(variable, "_Unsigned") === "true";
    const values = this.#read(variable);
    if (!(values instanceof Int8Array)) return unsigned ? asUnsigned(values) : values;
    return unsigned ? new Uint8Array(values.buffer) : Int16Array.from(values);
  }

  close(): void {
    // The file was read as a whole when it was opened.
  }

  #read(name: string): ClassicValues {
    const where = `${this.path}, ${name}`;
    const variable = this.#header.variables.get(name);
    if (variable === undefined || variable.type === "char") {
      throw new InputError("there is no such variable of numbers", where, "ask for one that the file holds");
    }
    const count = variable.shape.reduce((product, length) => product * length, 1);
    if (!(count <= MAX_VARIABLE_ELEMENTS)) {
      throw new InputError(
        `a variable of ${count} elements is larger than the ${MAX_VARIABLE_ELEMENTS} that are read`,
        where,
        "check the file; no radar sweep is that large",
      );
    }
    return fromBigEndian(this.#rawBytes(variable, where), variable.type);
  }

  /** The bytes of a variable, record by record; that they are there is checked before room is made for them. */
  #rawBytes(variable: ClassicVariable, where: string): Uint8Array<ArrayBuffer> {
    const { recordBytes } = this.#header;
    const runs = variable.isRecord ? (variable.shape[0] as number) : 1;
    const length = runBytes(variable);
    const end = variable.offset + (runs - 1) * recordBytes * Number(variable.isRecord) + length;
    if (runs > 0 && !(end <= this.#bytes.length)) throw damaged("the file is cut short here", where);
    const raw = new Uint8Array(runs * length);
    for (let run = 0; run < runs; run++) {
      const from = variable.offset + run * recordBytes;
      raw.set(this.#bytes.subarray(from, from + length), run * length);
    }
    return raw;
  }
}

function fromBigEndian(raw: Uint8Array<ArrayBuffer>, type: ClassicType): ClassicValues {
  const bytes = Buffer.from(raw.buffer);
  switch (type) {
    case "short":
      return new Int16Array(bytes.swap16().buffer);
    case "int":
      return new Int32Array(bytes.swap32().buffer);
    case "float":
      return new Float32Array(bytes.swap32().buffer);
    case "double":
      return new Float64Array(bytes.swap64().buffer);
    default:
      return new Int8Array(raw.buffer);
  }
}

function damaged(what: string, where: string, cause?: unknown): InputError {
  return new InputError(`the file is damaged: ${what}`, where, "fetch it again", { cause });
}
