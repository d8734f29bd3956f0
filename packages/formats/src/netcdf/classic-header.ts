/** Types of classic NetCDF, by the number that stands for them. */
const TYPES = [undefined, "byte", "char", "short", "int", "float", "double"] as const;

export type ClassicType = Exclude<(typeof TYPES)[number], undefined>;

export const TYPE_BYTES: Readonly<Record<ClassicType, number>> = {
  byte: 1,
  char: 1,
  short: 2,
  int: 4,
  float: 4,
  double: 8,
};

export type ClassicAttribute = string | Float64Array;

export interface ClassicVariable {
  readonly name: string;
  /** Lengths, that of the record dimension filled in. */
  readonly shape: readonly number[];
  readonly isRecord: boolean;
  readonly attributes: ReadonlyMap<string, ClassicAttribute>;
  readonly type: ClassicType;
  /** Where its values begin in the file. */
  readonly offset: number;
}

export interface ClassicHeader {
  readonly attributes: ReadonlyMap<string, ClassicAttribute>;
  readonly variables: ReadonlyMap<string, ClassicVariable>;
  /** Bytes from one record to the next. */
  readonly recordBytes: number;
}

const DIMENSIONS = 10;
const VARIABLES = 11;
const ATTRIBUTES = 12;
/** A record count that says "as many as the file holds", of files that were never closed. */
const STREAMING = 0xffff_ffff;

/**
 * Reads the header of a classic NetCDF file. Every count is held against the bytes that are left before anything is
 * allocated for it, which general readers leave out.
 *
 * @throws RangeError where the header does not hold together
 * @see The NetCDF Classic Format Specification, versions 1 and 2 (Unidata)
 */
export function classicHeader(bytes: Buffer): ClassicHeader {
  const cursor = new Cursor(bytes);
  const wideOffsets = bytes[3] === 2;
  const recordCount = cursor.count();
  if (recordCount === STREAMING) throw new RangeError("the file was never closed");
  const lengths: number[] = [];
  for (let left = cursor.list(DIMENSIONS, 8); left > 0; left--) {
    cursor.name();
    lengths.push(cursor.count());
  }
  const attributes = readAttributes(cursor);
  const variables = new Map<string, ClassicVariable>();
  let recordBytes = 0;
  let lone: ClassicVariable | undefined;
  let recordVariables = 0;
  for (let left = cursor.list(VARIABLES, 28); left > 0; left--) {
    const variable = readVariable(cursor, lengths, recordCount, wideOffsets);
    if (variables.has(variable.name)) throw new RangeError("a variable is there twice");
    variables.set(variable.name, variable);
    if (!variable.isRecord) continue;
    recordVariables++;
    lone = variable;
    recordBytes += Math.ceil(runBytes(variable) / 4) * 4;
  }
  // A record variable that is alone is stored without padding.
  if (recordVariables === 1 && lone !== undefined) recordBytes = runBytes(lone);
  return { attributes, variables, recordBytes };
}

/** Bytes of a variable that lie together: all of it, or what one record has of it. */
export function runBytes({ shape, isRecord, type }: ClassicVariable): number {
  const run = isRecord ? shape.slice(1) : shape;
  return run.reduce((product, length) => product * length, 1) * TYPE_BYTES[type];
}

function readVariable(
  cursor: Cursor,
  lengths: readonly number[],
  recordCount: number,
  wideOffsets: boolean,
): ClassicVariable {
  const name = cursor.name();
  const shape: number[] = [];
  let isRecord = false;
  const rank = cursor.bounded(4);
  for (let axis = 0; axis < rank; axis++) {
    const length = lengths[cursor.count()];
    if (length === undefined || (length === 0 && axis > 0)) throw new RangeError("a dimension is missing");
    isRecord ||= length === 0;
    shape.push(length === 0 ? recordCount : length);
  }
  const attributes = readAttributes(cursor);
  const type = cursor.type();
  // The stated size is redundant, and wrong by design for large variables.
  cursor.count();
  const offset = wideOffsets ? cursor.wide() : cursor.count();
  return { name, shape, isRecord, attributes, type, offset };
}

function readAttributes(cursor: Cursor): ReadonlyMap<string, ClassicAttribute> {
  const attributes = new Map<string, ClassicAttribute>();
  for (let left = cursor.list(ATTRIBUTES, 12); left > 0; left--) {
    const name = cursor.name();
    const type = cursor.type();
    const count = cursor.bounded(TYPE_BYTES[type]);
    attributes.set(name, cursor.values(type, count));
  }
  return attributes;
}

const utf8 = new TextDecoder();

class Cursor {
  readonly #bytes: Buffer;
  #at = 4;

  constructor(bytes: Buffer) {
    this.#bytes = bytes;
  }

  count(): number {
    const value = this.#bytes.readUInt32BE(this.#at);
    this.#at += 4;
    return value;
  }

  wide(): number {
    const value = Number(this.#bytes.readBigUInt64BE(this.#at));
    this.#at += 8;
    return value;
  }

  type(): ClassicType {
    const type = TYPES[this.count()];
    if (type === undefined) throw new RangeError("a type is none of the format");
    return type;
  }

  /** A count of things that take at least so many bytes each, which must still be there. */
  bounded(bytesEach: number): number {
    const count = this.count();
    if (count * bytesEach > this.#bytes.length - this.#at) throw new RangeError("a count is beyond the file");
    return count;
  }

  /** Number of members of a list; an absent one has tag and count 0. */
  list(tag: number, bytesEach: number): number {
    const found = this.count();
    const count = this.bounded(bytesEach);
    if (found !== tag && !(found === 0 && count === 0)) throw new RangeError("a list has another tag");
    return count;
  }

  name(): string {
    return utf8.decode(this.#take(this.bounded(1)));
  }

  values(type: ClassicType, count: number): ClassicAttribute {
    const bytes = this.#take(count * TYPE_BYTES[type]);
    if (type === "char") return utf8.decode(bytes).split("\0")[0]?.trim() ?? "";
    return Float64Array.from({ length: count }, (_, index) => numberAt(bytes, type, index));
  }

  /** Bytes, and what fills them up to a multiple of four. */
  #take(length: number): Buffer {
    const taken = this.#bytes.subarray(this.#at, this.#at + length);
    this.#at += Math.ceil(length / 4) * 4;
    return taken;
  }
}

function numberAt(bytes: Buffer, type: Exclude<ClassicType, "char">, index: number): number {
  switch (type) {
    case "byte":
      return bytes.readInt8(index);
    case "short":
      return bytes.readInt16BE(2 * index);
    case "int":
      return bytes.readInt32BE(4 * index);
    case "float":
      return bytes.readFloatBE(4 * index);
    case "double":
      return bytes.readDoubleBE(8 * index);
  }
}
