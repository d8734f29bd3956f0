import { readFileSync, statSync } from "node:fs";
import { InputError, type StoredValues } from "@rainreckon/core";
import { NetCDFReader } from "netcdfjs";
import type { AttributeValue } from "../hdf5/index.ts";
import { MAX_VARIABLE_ELEMENTS, type NetcdfFile } from "./netcdf-file.ts";
import { asUnsigned } from "./unsigned.ts";

const MAX_FILE_BYTES = 1_000_000_000;

type ClassicVariable = NetCDFReader["variables"][number];

const WIDTHS: Readonly<Record<string, number>> = { byte: 1, short: 2, int: 4, float: 4, double: 8 };

/**
 * A NetCDF classic file, versions 1 and 2 (64-bit offsets). A general library reads its header; values are taken
 * from the bytes here, so that a size that the header claims is held against the file before anything is allocated.
 *
 * @throws InputError where it is damaged, cut short or no classic NetCDF
 * @see The NetCDF Classic Format Specification (Unidata)
 */
export function openClassic(path: string): NetcdfFile {
  let bytes: Buffer;
  try {
    if (statSync(path).size > MAX_FILE_BYTES) {
      throw new InputError("the file is larger than 1 GB", path, "store it as NetCDF-4");
    }
    bytes = readFileSync(path);
  } catch (error) {
    if (error instanceof InputError) throw error;
    throw new InputError("cannot be opened", path, "check that the file exists and may be read", {
      cause: error,
    });
  }
  let reader: NetCDFReader;
  try {
    reader = new NetCDFReader(bytes);
  } catch (cause) {
    throw damaged("its head cannot be read", path, cause);
  }
  return new Classic(path, bytes, reader);
}

class Classic implements NetcdfFile {
  readonly path: string;
  readonly kind = "NetCDF-3";
  readonly #bytes: Buffer;
  readonly #reader: NetCDFReader;
  readonly #variables: ReadonlyMap<string, ClassicVariable>;
  readonly #recordBytes: number;

  constructor(path: string, bytes: Buffer, reader: NetCDFReader) {
    this.path = path;
    this.#bytes = bytes;
    this.#reader = reader;
    const variables = reader.variables ?? [];
    this.#variables = new Map(variables.map((variable) => [variable.name, variable]));
    const records = variables.filter(({ record }) => record);
    // A record variable that is alone is stored without the padding that its stated size includes.
    this.#recordBytes =
      records.length === 1
        ? this.#elementsOfRecord(records[0] as ClassicVariable) * (WIDTHS[records[0]?.type ?? ""] ?? 1)
        : (reader.recordDimension.recordStep ?? 0);
  }

  variables(group: string): readonly string[] {
    return group === "" ? [...this.#variables.keys()] : [];
  }

  groups(): readonly string[] {
    return [];
  }

  shapeOf(variable: string): readonly number[] | undefined {
    const found = this.#variables.get(variable);
    return found === undefined || WIDTHS[found.type] === undefined ? undefined : this.#shape(found);
  }

  attribute(object: string, name: string): AttributeValue | undefined {
    const attributes =
      object === "" ? this.#reader.globalAttributes : (this.#variables.get(object)?.attributes ?? []);
    const found = attributes?.find((attribute) => attribute.name === name);
    const value: unknown = found?.value;
    if (typeof value === "string") return value.split("\0")[0]?.trim();
    if (typeof value !== "number" && !Array.isArray(value)) return undefined;
    const numbers = Float64Array.from([value].flat(), Number);
    // The library hands bytes out unsigned; in classic NetCDF they are signed.
    const signed = found?.type === "byte" ? numbers.map((byte) => (byte > 127 ? byte - 256 : byte)) : numbers;
    return signed.length === 1 ? signed[0] : signed;
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

  #shape(variable: ClassicVariable): readonly number[] {
    return variable.dimensions.map((id) => {
      const dimension = this.#reader.dimensions[id];
      if (dimension === undefined) throw damaged("a dimension is missing", `${this.path}, ${variable.name}`);
      return id === this.#reader.recordDimension.id ? this.#reader.recordDimension.length : dimension.size;
    });
  }

  #elementsOfRecord(variable: ClassicVariable): number {
    return this.#shape(variable)
      .slice(1)
      .reduce((product, length) => product * length, 1);
  }

  #read(name: string): Int8Array<ArrayBuffer> | Exclude<StoredValues, Uint8Array | Uint16Array> {
    const where = `${this.path}, ${name}`;
    const variable = this.#variables.get(name);
    const width = WIDTHS[variable?.type ?? ""];
    if (variable === undefined || width === undefined) {
      throw new InputError("there is no such variable of numbers", where, "ask for one that the file holds");
    }
    const shape = this.#shape(variable);
    const count = shape.reduce((product, length) => product * length, 1);
    if (!(count <= MAX_VARIABLE_ELEMENTS)) {
      throw new InputError(
        `a variable of ${count} elements is larger than the ${MAX_VARIABLE_ELEMENTS} that are read`,
        where,
        "check the file; no radar sweep is that large",
      );
    }
    const runs = variable.record ? (shape[0] as number) : 1;
    const runBytes = variable.record ? this.#elementsOfRecord(variable) * width : count * width;
    const end = variable.offset + (runs - 1) * (variable.record ? this.#recordBytes : 0) + runBytes;
    if (count > 0 && !(end <= this.#bytes.length)) throw damaged("the file is cut short here", where);
    const raw = new Uint8Array(count * width);
    for (let run = 0; run < runs && count > 0; run++) {
      const from = variable.offset + run * this.#recordBytes;
      raw.set(this.#bytes.subarray(from, from + runBytes), run * runBytes);
    }
    return fromBigEndian(raw, variable.type);
  }
}

function fromBigEndian(
  raw: Uint8Array<ArrayBuffer>,
  type: string,
): Int8Array<ArrayBuffer> | Exclude<StoredValues, Uint8Array | Uint16Array> {
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
