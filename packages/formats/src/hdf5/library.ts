import { ready } from "h5wasm/node";

/** The HDF5 library as it is loaded: only its flat functions are used, because those report their status. */
export type Hdf5Library = Awaited<typeof ready>;

/** What is used here of the library's own file layer. */
interface FileLayer {
  open: (path: string, flags: number | string, mode?: number) => unknown;
  write: (
    stream: { readonly fd: number },
    bytes: unknown,
    offset: number,
    length: number,
    at?: number,
  ) => number;
  read: (stream: unknown, bytes: unknown, offset: number, length: number, at?: number) => number;
  readonly ErrnoError: new (code: number) => Error;
}

const PERMISSION_DENIED = 2;
const DIAGNOSTICS_DESCRIPTOR = 2;

let library: Hdf5Library | undefined;
/** While a call of ours runs, the only file that the library may open. */
let onlyPath: string | undefined;
/** How often the library has read from a file. */
let fileReads = 0;

/** Loads the HDF5 library once; everything else here is synchronous afterwards. */
export async function hdf5Ready(): Promise<void> {
  if (library !== undefined) return;
  const loaded = await ready;
  if (library === undefined) {
    confine(loaded.FS as unknown as FileLayer);
    library = loaded;
  }
}

/**
 * Links inside an HDF5 file may name other files, so a scan from a stranger could have the library open any
 * path: while we read, only the path that was handed to us opens. The library also prints its own account of
 * every failure; we report failures ourselves, so that goes nowhere.
 */
function confine(files: FileLayer): void {
  const open = files.open.bind(files);
  files.open = (path, flags, mode) => {
    if (onlyPath !== undefined && path !== onlyPath) throw new files.ErrnoError(PERMISSION_DENIED);
    return open(path, flags, mode);
  };
  const write = files.write.bind(files);
  files.write = (stream, bytes, offset, length, at) =>
    stream.fd === DIAGNOSTICS_DESCRIPTOR ? length : write(stream, bytes, offset, length, at);
  const read = files.read.bind(files);
  files.read = (stream, bytes, offset, length, at) => {
    fileReads += 1;
    return read(stream, bytes, offset, length, at);
  };
}

/** How often the library reads from a file while `work` runs. */
export function countFileReads(work: () => void): number {
  const before = fileReads;
  work();
  return fileReads - before;
}

/**
 * Runs one call of the library, with file access confined to `path`.
 *
 * The library's loader warns on stderr about names that are not UTF-8 and about memory that it cannot get, as
 * damaged files bring about; the call reports its failure itself. Nothing else can run or write meanwhile.
 *
 * Some calls throw out of the compiled code, and each such throw loses a piece of the library's stack: after
 * some 15,000 of them it aborts for good. `ccall` notes the stack's height before it converts its arguments and
 * goes back to it at the end; so the call runs while an argument is converted, inside that bracket.
 *
 * @throws whatever the call throws
 */
export function callLibrary<T>(path: string, call: (library: Hdf5Library) => T): T {
  const loaded = loadedLibrary();
  let result: { readonly value: T } | undefined;
  let thrown: { readonly error: unknown } | undefined;
  const oneZeroByte = {
    0: 0,
    get length() {
      if (result === undefined && thrown === undefined) {
        try {
          result = { value: call(loaded) };
        } catch (error) {
          thrown = { error };
        }
      }
      return 1;
    },
  };
  const { stderr } = process;
  const { write } = stderr;
  stderr.write = () => true;
  onlyPath = path;
  try {
    loaded.ccall("strlen", "number", ["array"], [oneZeroByte as unknown as number[]]);
  } finally {
    onlyPath = undefined;
    stderr.write = write;
  }
  if (result === undefined) throw thrown?.error;
  return result.value;
}

/**
 * Has the library fill a piece of its memory and hands back a copy.
 *
 * The memory is cleared first: what the library leaves untouched must not be what an earlier read left there.
 *
 * @param fill - gets the address; returns the library's status, negative for failure
 * @returns the bytes, or undefined where the library reported a failure
 */
export function readBytes(
  path: string,
  byteCount: number,
  fill: (library: Hdf5Library, address: number) => number,
): Uint8Array<ArrayBuffer> | undefined {
  const loaded = loadedLibrary();
  const address = loaded._malloc(Math.max(byteCount, 1));
  if (address === 0) throw new RangeError(`no memory left for ${byteCount} bytes`);
  try {
    loaded.HEAPU8.fill(0, address, address + byteCount);
    const status = callLibrary(path, () => fill(loaded, address));
    if (status < 0) return undefined;
    return loaded.HEAPU8.slice(address, address + byteCount) as Uint8Array<ArrayBuffer>;
  } finally {
    loaded._free(address);
  }
}

function loadedLibrary(): Hdf5Library {
  if (library === undefined)
    throw new RangeError("the HDF5 library is not loaded yet: await formatsReady() first");
  return library;
}
