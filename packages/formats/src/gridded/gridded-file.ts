import type { InputError, Notice } from "@rainreckon/core";

/** What a gridded product can hold that a rain total may start from. The unit is part of the name. */
export type GriddedQuantity = "rainRateMmPerHour" | "depthMm" | "reflectivityDbz";

/** Where the cells of a grid lie. Row 0 is the northernmost, column 0 the westernmost. */
export type GridPlace =
  | {
      /** Edges of cell (0, 0) in the grid's own coordinates: metres, or degrees where `crs` is geographic. */
      readonly kind: "affine";
      /** A PROJ string or an authority code such as "EPSG:3035". */
      readonly crs: string;
      readonly west: number;
      readonly north: number;
      readonly cellWidth: number;
      readonly cellHeight: number;
    }
  | {
      /** The outer corner of cell (0, 0) by longitude and latitude, degrees: to be projected by `crs`. */
      readonly kind: "corner";
      readonly crs: string;
      readonly lonDeg: number;
      readonly latDeg: number;
      readonly cellWidth: number;
      readonly cellHeight: number;
    }
  | {
      /** Centre of each cell, shape [ny, nx] each, degrees. */
      readonly kind: "positions";
      readonly lonDeg: Float64Array;
      readonly latDeg: Float64Array;
    };

/** One layer of a gridded file, without its values. */
export interface GriddedHeader {
  /** Where it came from: the path as it was handed in, and the place inside the file. */
  readonly origin: { readonly path: string; readonly dataset: string };
  readonly quantity: GriddedQuantity;
  readonly nx: number;
  readonly ny: number;
  readonly place: GridPlace;
  /** Equal for an instant. A depth belongs to (start, end]. */
  readonly startEpochMs: number;
  readonly endEpochMs: number;
  /** What had to be assumed or was odd, one sentence each. */
  readonly remarks: readonly string[];
}

/** One layer with its values. */
export interface GriddedScan extends GriddedHeader {
  /**
   * Shape [ny, nx]. NaN is not observed. Observed without rain is 0 for rate and depth, -Infinity for reflectivity.
   */
  readonly values: Float32Array;
}

/** A file of gridded layers, open for reading. */
export interface GriddedFile {
  /** Name of the format, as people know it. */
  readonly format: string;
  readonly headers: readonly GriddedHeader[];
  readonly remarks: readonly Notice[];
  /** Layers that cannot be used, and why. */
  readonly leftOut: readonly InputError[];
  /** @param index - place in `headers`. Rejects with InputError where the layer fails to decode */
  readLayer(index: number): Promise<GriddedScan>;
  close(): void;
}

/** What a file may not say itself. */
export interface GriddedOptions {
  /** Span that a layer speaks for, where neither tags nor the file's name tell. */
  readonly time?: { readonly startEpochMs: number; readonly endEpochMs: number };
  /** What it holds, where no unit or name tells. */
  readonly quantity?: GriddedQuantity;
  /** Its coordinate system, where the file has none that can be read. */
  readonly crs?: string;
}

/** A format of gridded layers: how it is told from others, and how it is opened. */
export interface GriddedFormat {
  readonly name: string;
  /** @param head - the first bytes of the file: all of a short file, else a few thousand */
  recognise(head: Uint8Array): boolean;
  /** Resolves to undefined where a look inside shows something else; rejects with InputError where nothing is usable. */
  open(path: string, options: GriddedOptions): Promise<GriddedFile | undefined>;
}

/** Most cells of one layer; asked before anything is allocated. */
export const MAX_CELLS = 64_000_000;
