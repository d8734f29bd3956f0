import type { StepSeries } from "../input.ts";

/**
 * What the page's script is handed, as JSON inside the page. Plain data, shared by the writer of the page and the
 * script that reads it; texts are clean of control characters and are only ever set as text.
 */
export interface PageData {
  readonly map: PageMap;
  /** Minutes that the local clock is ahead of UTC, each from its instant on. */
  readonly clock: readonly (readonly [fromEpochMs: number, offsetMinutes: number])[];
  /** "Europe/Amsterdam"; empty where the local clock is UTC. */
  readonly zone: string;
  readonly window: readonly [startEpochMs: number, endEpochMs: number];
  readonly layers: readonly PageLayer[];
  /** Index of the layer that is shown first. */
  readonly shown: number;
  readonly places: readonly PagePlace[];
}

/** Where the grid lies on the drawing, in the drawing's units, and in the world. */
export interface PageMap {
  readonly viewWidth: number;
  readonly viewHeight: number;
  readonly left: number;
  readonly top: number;
  readonly width: number;
  readonly height: number;
  readonly westM: number;
  readonly northM: number;
  readonly cellM: number;
  readonly nx: number;
  readonly ny: number;
  /** Longitude and latitude at the corners of equal parts of the grid, rows from the north. */
  readonly lattice?: {
    readonly across: number;
    readonly down: number;
    readonly lonDeg: readonly number[];
    readonly latDeg: readonly number[];
  };
}

/** How stored numbers become values: code 0 is not observed, code k is `offset + (k - 1) * step`. */
export interface Quantised {
  readonly nx: number;
  readonly ny: number;
  /** Grid cells to a side of one stored cell. */
  readonly block: number;
  readonly step: number;
  readonly offset: number;
  /** Number of fields in `data`, one after the other. */
  readonly count: number;
  /** See `data/quantise.ts`. */
  readonly data: string;
}

export interface PageClasses {
  /** Lower edges, ascending. */
  readonly edges: readonly number[];
  /** CSS colours; empty for nothing drawn. */
  readonly colours: readonly string[];
  /** Words of the legend, in the unit of the layer. */
  readonly labels: readonly string[];
}

export type PageUnit = "mm" | "%" | "m" | "dB" | "";

export interface PageLayer {
  readonly id: string;
  readonly label: string;
  readonly what: string;
  /** Heading of the list that it stands under; empty for those with a button of their own. */
  readonly group: string;
  readonly unit: PageUnit;
  readonly classes: PageClasses;
  /** For layers of names: one a category, in the order of the values. */
  readonly names?: readonly string[];
  readonly field: Quantised;
  /** The intervals that add up to it. */
  readonly frames?: {
    readonly intervals: readonly (readonly [startEpochMs: number, endEpochMs: number])[];
    readonly classes: PageClasses;
    readonly fields: Quantised;
    /** What was thinned, in words; empty where nothing was. */
    readonly note: string;
  };
}

export type PlaceKind = "gauge" | "catchment" | "radar" | "asset";

export interface PagePlace {
  /** "g0", "c3": kind and index, as marks on the page bear it. */
  readonly key: string;
  readonly kind: PlaceKind;
  readonly title: string;
  readonly subtitle: string;
  readonly xM: number;
  readonly yM: number;
  /** What is known of it: label and text, depths in mm. */
  readonly facts: readonly (readonly [label: string, text: string])[];
  /** Cautions that belong beside its figures. */
  readonly cautions: readonly string[];
  readonly series?: PageSeries;
  /** Bounds of its depth, mm. */
  readonly range?: readonly [p10Mm: number, p90Mm: number];
}

/** Rain against time. Steps are (start, end]. */
export interface PageSeries {
  readonly startEpochMs: number;
  readonly stepMs: number;
  /** True where steps were joined to keep the page small. */
  readonly joined: boolean;
  readonly sides: readonly {
    readonly role: StepSeries["role"];
    /** Hundredths of a millimetre; null where not observed. */
    readonly centiMm: readonly (number | null)[];
    /** Steps that were observed in part, each with its share in per cent. */
    readonly partly: readonly (readonly [step: number, percent: number])[];
  }[];
}
