import { open } from "node:fs/promises";
import { File, Module, ready } from "h5wasm/node";
import { outputFault } from "./fault.ts";
import type { AttributeValue } from "./grid-mapping.ts";
import { withoutControlCharacters } from "./text.ts";

/** Values as they lie in memory, little-endian, with the type that the file gives them. */
export type SlabValues = Float32Array | Float64Array | Uint8Array;
/** Values of a dataset that is written in one piece. */
export type WholeValues = SlabValues | Uint16Array | Int32Array;

/** Element types by the names that the library uses; "S1" is one byte of text. */
export type ElementType = "<f" | "<d" | "<i" | "<B" | "<H" | "S1";

export interface DatasetShape {
  readonly type: ElementType;
  readonly shape: readonly number[];
  /** Compressed in chunks of this shape; left out where the values are few and lie in one piece. */
  readonly chunks?: readonly number[];
}

/** An object header of HDF5 holds less than 64 KiB, so a text attribute does too. */
const LONGEST_TEXT_BYTES = 60_000;
const DEFLATE_LEVEL = 4;
const DIAGNOSTICS_DESCRIPTOR = 2;

/**
 * An HDF5 file that is being written, in the dialect that NetCDF-4 readers expect.
 *
 * The library drops the status of writes that happen as a dataset closes, so a full disk could pass
 * unseen: every write of the process is watched while it works, and the first failure ends the file.
 * While it works the clock stands still, since HDF5 puts the time into object headers and the same
 * data must give the same bytes. Both hold only within one synchronous call.
 */
export class Hdf5Output {
  readonly #path: string;
  readonly #file: File;
  #failure: unknown;
  #closed = false;

  private constructor(path: string, file: File) {
    this.#path = path;
    this.#file = file;
  }

  /** @throws InputError when the file cannot be created */
  static async create(path: string): Promise<Hdf5Output> {
    await ready;
    // The library says only that it failed; opening it ourselves first says why.
    try {
      await (await open(path, "w")).close();
    } catch (cause) {
      throw outputFault(path, cause);
    }
    const { result, failure } = watched(
      // "earliest to v110" is what NetCDF libraries of the last ten years can read.
      () => new File(path, "w", { track_order: true, libver: ["earliest", "v110"] }),
    );
    if (failure !== undefined || result === undefined || result.file_id < 0n) {
      throw outputFault(path, failure ?? new Error("HDF5 refused to create the file"));
    }
    return new Hdf5Output(path, result);
  }

  /**
   * Make a dataset: at once from its values, or, where `chunks` is given, empty until
   * {@link writeSlab} fills it, so that it may be of any size.
   */
  createDataset(name: string, shaped: DatasetShape, values?: WholeValues): void {
    const { type, shape, chunks } = shaped;
    if ((chunks === undefined) === (values === undefined)) throw new RangeError(`${name}: values or chunks`);
    this.#run(() => {
      this.#file.create_dataset({
        name,
        data: values ?? new Uint8Array(0),
        // A chunked one is made with no rows and then let grow: the library would want all values at once.
        shape: chunks === undefined ? [...shape] : [0, ...shape.slice(1)],
        dtype: type,
        track_order: true,
        ...(chunks && {
          maxshape: [...shape],
          chunks: [...chunks],
          compression: "gzip",
          compression_opts: DEFLATE_LEVEL,
        }),
      });
      this.#check(this.#file.get(name) === null ? -1 : 0, name);
      if (chunks !== undefined) {
        this.#check(Module.resize_dataset(this.#file.file_id, `/${name}`, shape.map(BigInt)), name);
      }
    });
  }

  /** Write values to a block of a chunked dataset. */
  writeSlab(name: string, offset: readonly number[], count: readonly number[], values: SlabValues): void {
    this.#run(() => {
      const bytes = new Uint8Array(values.buffer, values.byteOffset, values.byteLength);
      const pointer = Module._malloc(bytes.length);
      if (pointer === 0) throw new RangeError(`${name} needs more memory than there is`);
      try {
        Module.HEAPU8.set(bytes, pointer);
        const status = Module.set_dataset_data(
          this.#file.file_id,
          `/${name}`,
          count.map(BigInt),
          offset.map(BigInt),
          count.map(() => 1n),
          BigInt(pointer),
        );
        this.#check(status, name);
      } finally {
        Module._free(pointer);
      }
    });
  }

  /** Attributes of a dataset, or of the file as a whole for "/". Empty text is left out. */
  setAttributes(name: string, attributes: Readonly<Record<string, AttributeValue>>): void {
    this.#run(() => {
      const object = this.#file.get(name === "/" ? "/" : `/${name}`);
      if (object === null || !("create_attribute" in object)) throw new RangeError(`no object named ${name}`);
      const wanted: string[] = [];
      for (const [key, value] of Object.entries(attributes)) {
        if (!/^[A-Za-z_][A-Za-z0-9_]*$/.test(key)) throw new RangeError(`attribute name ${key}`);
        if (typeof value !== "string") {
          const numbers = typeof value === "number" ? [value] : value;
          object.create_attribute(key, Float64Array.from(numbers), [numbers.length], "<d");
        } else {
          const text = withoutControlCharacters(value, true);
          const bytes = Buffer.byteLength(text);
          if (bytes > LONGEST_TEXT_BYTES)
            throw new RangeError(`attribute ${key} of ${name} is ${bytes} bytes`);
          if (bytes === 0) continue;
          object.create_attribute(key, text, null, `S${bytes}`);
        }
        wanted.push(key);
      }
      // The library does not tell when an attribute could not be made, so look.
      const made = new Set(Object.keys(object.attrs));
      for (const key of wanted) if (!made.has(key)) this.#check(-1, `${name}:${key}`);
    });
  }

  /** The fill value must have the type of the data, so it is not one of the other attributes. */
  setNanFillValue(name: string, type: "<f" | "<d"): void {
    this.#run(() => {
      const value = type === "<f" ? Float32Array.of(Number.NaN) : Float64Array.of(Number.NaN);
      const object = this.#file.get(`/${name}`);
      if (object === null || !("create_attribute" in object)) throw new RangeError(`no object named ${name}`);
      object.create_attribute("_FillValue", value, [1], type);
    });
  }

  /** Declare a dataset to be the scale of a dimension. */
  makeScale(name: string, scaleName: string): void {
    this.#run(() => this.#check(Module.set_scale(this.#file.file_id, `/${name}`, scaleName), name));
  }

  /** Tie the dimensions of a dataset, in order, to their scales. */
  attachScales(name: string, scales: readonly string[]): void {
    this.#run(() => {
      scales.forEach((scale, index) => {
        this.#check(Module.attach_scale(this.#file.file_id, `/${name}`, `/${scale}`, index), name);
      });
    });
  }

  /** Finish the file. @throws InputError when the last bytes could not be written */
  close(): void {
    if (this.#closed) return;
    this.#run(() => this.#check(Module.flush(this.#file.file_id), "flush"));
    this.#run(() => {
      this.#closed = true;
      this.#check(this.#file.close(), "close");
    });
  }

  /** Let go of the file as it stands. Throws nothing: it is what one does after a failure. */
  abandon(): void {
    if (this.#closed) return;
    this.#closed = true;
    watched(() => this.#file.close());
  }

  #check(status: number, what: string): void {
    if (status < 0) this.#failure ??= new Error(`HDF5 could not write ${what}`);
  }

  #run(work: () => void): void {
    if (this.#failure === undefined) {
      if (this.#closed) throw new RangeError(`${this.#path} is closed`);
      const { failure } = watched(work);
      // What the system said comes first: it is the reason for the library's status.
      if (failure !== undefined) this.#failure = failure;
    }
    if (this.#failure === undefined) return;
    this.abandon();
    throw outputFault(this.#path, this.#failure);
  }
}

/**
 * Run one synchronous piece of work of the HDF5 library with the clock standing still, its
 * diagnostics held back, and every failed write noted.
 */
function watched<T>(work: () => T): { result?: T; failure: unknown } {
  const files = Module.FS;
  const write = files.write;
  const now = Date.now;
  let failure: unknown;
  files.write = (stream, buffer, offset, length, ...rest) => {
    // HDF5 prints a stack of its own errors; our one line says what the user can act on.
    if ("fd" in stream && stream.fd === DIAGNOSTICS_DESCRIPTOR) return length;
    try {
      return write.call(files, stream, buffer, offset, length, ...rest);
    } catch (cause) {
      failure ??= cause;
      throw cause;
    }
  };
  Date.now = () => 0;
  try {
    return { result: work(), failure };
  } catch (cause) {
    if (failure === undefined) throw cause;
    return { failure };
  } finally {
    files.write = write;
    Date.now = now;
  }
}
