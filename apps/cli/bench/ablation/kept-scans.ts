import type { InputError, Sweep, SweepHeader } from "@rainreckon/core";
import type { ScanFile, ScanOptions } from "@rainreckon/formats";
import { openScans as openOnDisk, type ScanPaths } from "../../src/scans/scan-files.ts";

export { joinChunks, type ScanPaths } from "../../src/scans/scan-files.ts";

/** Stands for `src/scans/scan-files.ts` in the bundle of the ablation: a world is reckoned in many ways, and read once. */
const kept = new Map<string, KeptScan>();
let isKeeping = false;
let shown: ReadonlySet<string> | undefined;

/**
 * Forgets all scans, and keeps those that are opened from now on or not: a large world does not fit into memory.
 *
 * @param moments - by name: as if the files held no others; undefined shows all
 */
export function keepScans(keep: boolean, moments?: readonly string[]): void {
  kept.clear();
  isKeeping = keep;
  shown = moments === undefined ? undefined : new Set(moments);
}

/** As the function of the same name that it stands for. */
export function openScans(paths: ScanPaths, options: ScanOptions = {}): ScanFile {
  if (!isKeeping) return new ShownScan(openOnDisk(paths, options));
  const key = JSON.stringify([paths.path, paths.chunks, options]);
  const known = kept.get(key) ?? new KeptScan(paths, options);
  kept.set(key, known);
  return known;
}

/** A file whose sweeps stay decoded; it is opened again where something else is asked of it. */
class KeptScan implements ScanFile {
  readonly format: string;
  readonly headers: ScanFile["headers"];
  readonly remarks: ScanFile["remarks"];
  readonly leftOut: ScanFile["leftOut"];
  readonly #open: () => ScanFile;
  readonly #sweeps = new Map<string, Sweep>();
  #file: ScanFile | undefined;
  #faults: readonly InputError[] | undefined;

  constructor(paths: ScanPaths, options: ScanOptions) {
    this.#open = () => new ShownScan(openOnDisk(paths, options));
    const file = this.#opened();
    this.format = file.format;
    this.headers = file.headers;
    this.remarks = file.remarks;
    this.leftOut = file.leftOut;
  }

  inspect(): readonly InputError[] {
    this.#faults ??= this.#opened().inspect();
    return this.#faults;
  }

  readSweep(index: number, quantities?: readonly string[]): Sweep {
    const key = `${index} ${quantities?.join() ?? "all"}`;
    const sweep = this.#sweeps.get(key) ?? this.#opened().readSweep(index, quantities);
    this.#sweeps.set(key, sweep);
    return sweep;
  }

  close(): void {
    this.#file?.close();
    this.#file = undefined;
  }

  #opened(): ScanFile {
    this.#file ??= this.#open();
    return this.#file;
  }
}

/** A file of which some moments are not shown. */
class ShownScan implements ScanFile {
  readonly format: string;
  readonly headers: ScanFile["headers"];
  readonly remarks: ScanFile["remarks"];
  readonly leftOut: ScanFile["leftOut"];
  readonly #file: ScanFile;

  constructor(file: ScanFile) {
    this.#file = file;
    this.format = file.format;
    this.headers = file.headers.map(withoutHidden);
    this.remarks = file.remarks;
    this.leftOut = file.leftOut;
  }

  inspect(): readonly InputError[] {
    return this.#file.inspect();
  }

  readSweep(index: number, quantities?: readonly string[]): Sweep {
    const sweep = this.#file.readSweep(index, quantities?.filter(isShown));
    return {
      ...withoutHidden(sweep),
      moments: new Map([...sweep.moments].filter(([name]) => isShown(name))),
    };
  }

  close(): void {
    this.#file.close();
  }
}

function isShown(quantity: string): boolean {
  return shown === undefined || shown.has(quantity);
}

function withoutHidden<Header extends SweepHeader>(header: Header): Header {
  return { ...header, quantities: header.quantities.filter(isShown) };
}
