import type { InputError, Notice, RadarSite, Sweep, SweepHeader } from "@rainreckon/core";

/** A file of radar scans, open for reading. */
export interface ScanFile {
  /** Name of the format, as people know it. */
  readonly format: string;
  /** The sweeps that can be used, in the order of the file. */
  readonly headers: readonly SweepHeader[];
  /** What is odd about the file as a whole. */
  readonly remarks: readonly Notice[];
  /** Sweeps that cannot be used, and why. */
  readonly leftOut: readonly InputError[];
  /**
   * Looks at how every moment is stored, without decoding any.
   *
   * @returns what {@link ScanFile.readSweep} would refuse, one fault a moment
   */
  inspect(): readonly InputError[];
  /**
   * Reads one sweep.
   *
   * @param index - place in {@link ScanFile.headers}
   * @param quantities - ODIM names of the moments wanted; all that the sweep holds where left out
   * @throws InputError where a moment is not there, does not fit the sweep, or fails to decode
   * @throws RangeError for an index without a header, and once the file is closed
   */
  readSweep(index: number, quantities?: readonly string[]): Sweep;
  /** Closes the file; a second time does nothing. */
  close(): void;
}

/** What a reader may be told that a file does not say. */
export interface ScanOptions {
  /** Where radars stand, by site id: for formats that leave that out. */
  readonly places?: ReadonlyMap<string, Omit<RadarSite, "id" | "name">>;
}

/** A format of radar scans: how it is told from others, and how it is opened. */
export interface ScanFormat {
  readonly name: string;
  /** @param head - the first bytes of the file: all of a short file, else a few thousand */
  recognise(head: Uint8Array, path: string): boolean;
  /**
   * @returns undefined where a look inside shows that the file is of another format
   * @throws InputError where nothing in the file can be used
   */
  open(path: string, options?: ScanOptions): ScanFile | undefined;
}
