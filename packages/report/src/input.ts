import type { Grid, Interval, Ring, Score } from "@rainreckon/core";
import type { FrameSeries } from "./data/frame-stack.ts";

/** A depth with all that decides how it may be printed. */
export interface DepthFigure {
  /** Depth over the part that was observed, mm; NaN where nothing was. */
  readonly mm: number;
  /** Share of area and time that was observed, 0 to 1. */
  readonly observedFraction: number;
  /** True where a capped rain rate went into it. */
  readonly atCap?: boolean;
  /** Why it is missing or only partly there. */
  readonly reason?: string;
}

/** One true depth in ten lies below the first bound, one above the second, mm. */
export interface DepthRangeFigure {
  readonly p10Mm: number;
  readonly p90Mm: number;
}

/** Something that could change the figure, in words that stand alone. */
export interface Caution {
  /** The caution that the relation was nobody's choice always leads. */
  readonly kind: "relation-not-chosen" | "other";
  readonly text: string;
  /** What a reader can do, or how much it matters. */
  readonly detail?: string;
}

/** How the total was adjusted to the gauges, or why it was not. */
export type AdjustmentStatement =
  | {
      readonly applied: true;
      /** "mean-field bias". */
      readonly method: string;
      /** Gauge/radar: what radar depth was multiplied by. */
      readonly factor: number;
      /** True where a limit of the plan cut the factor. */
      readonly limited: boolean;
    }
  | { readonly applied: false; readonly reason: string };

/** The error found by leaving gauges out, or why there is none. */
export type CrossValidationStatement =
  | {
      /** Finite, not negative. */
      readonly errorMm: number;
      /** In per cent of the mean gauge depth. */
      readonly errorPercent: number;
      /** Which error: "mean absolute error of window totals, each gauge left out in turn". */
      readonly what: string;
    }
  | { readonly reason: string };

/** How a method of adjustment was picked; errors are at gauges held out in turn, mm, NaN where there is none. */
export interface MethodChoiceStatement {
  readonly rule: string;
  /** Which gauges make a cluster. */
  readonly clusterRule: string;
  /** Title of the method that was picked. */
  readonly chosen: string;
  /** Error of the whole procedure at gauges that had no part in the choice, held out one by one and by clusters. */
  readonly outerErrorMm: number;
  readonly outerClusterErrorMm: number;
  readonly candidates: readonly {
    readonly title: string;
    readonly errorMm: number;
    readonly meanErrorMm: number;
    /** Root mean square at gauges held out with their whole cluster. */
    readonly clusterErrorMm: number;
    /** How often it was picked without some of the gauges. */
    readonly chosenInFolds: number;
    readonly notes: readonly string[];
  }[];
}

/** What was done to the echo before it became rain. */
export interface EchoStatement {
  /** Depth that each screen's echo would have made: mean over the district, and in the worst cell. */
  readonly screens: readonly {
    readonly name: string;
    readonly gates: number;
    readonly districtMm: number;
    readonly worstCellMm: number;
  }[];
  /** Decibels that each correction added: mean by depth over the district, and the largest of a cell. */
  readonly corrections: readonly {
    readonly name: string;
    readonly meanDb: number;
    readonly largestDb: number;
  }[];
  /** What the vertical profile added, by range from the radar. */
  readonly profile: readonly {
    readonly fromKm: number;
    readonly toKm: number;
    readonly wetGates: number;
    readonly meanDb: number;
    /** Gates that lie too high for it, and became not observed. */
    readonly lostGates: number;
  }[];
  /** What was learned of each radar, and what may be wrong with it. */
  readonly radars: readonly { readonly id: string; readonly statements: readonly string[] }[];
}

/** Values over the grid: shape [ny, nx], row-major, row 0 in the north, NaN not observed. */
export interface MapLayer {
  /**
   * What the values are: a depth, mm; a share of time that was observed, 0 to 1; any other share, 0 to 1, usually
   * small; a height, m; decibels; or an index into `radars` of {@link ReportInput}, NaN where no radar spoke.
   */
  readonly quantity: "depthMm" | "fraction" | "share" | "heightM" | "decibel" | "radarIndex";
  readonly id: string;
  /** Short, as a button says it: "Radar total". */
  readonly label: string;
  /** One sentence on what the numbers are, with heights said above what. */
  readonly what: string;
  readonly values: Float32Array;
  /** For depths that are no rain totals: their colours are their own, not those that all totals share. */
  readonly scale?: "error" | "own";
  /**
   * Heading of the list that it stands under where the page runs its script. Layers without one have a button of
   * their own, and are there without script and in print.
   */
  readonly group?: string;
}

export interface ReportRadar {
  readonly id: string;
  readonly name?: string;
  /** In the grid's coordinates, metres; NaN for a source that stands nowhere, such as rain that came gridded. */
  readonly xM: number;
  readonly yM: number;
}

/** What became of a gauge: used; doubted and therefore kept out; left out for another reason. */
export type GaugeRole = "used" | "doubted" | "left-out";

export interface ReportGauge {
  readonly network: string;
  readonly id: string;
  readonly name?: string;
  /** In the grid's coordinates, metres. */
  readonly xM: number;
  readonly yM: number;
  readonly role: GaugeRole;
  /** Over the time that gauge and radar both observed, mm; NaN where there is none. */
  readonly gaugeMm: number;
  readonly radarMm: number;
  /** Adjusted depth with this gauge left out of the adjustment; NaN where there is none. */
  readonly crossValidatedMm: number;
  /** Share of the window that both observed. */
  readonly commonFraction: number;
  readonly radarId?: string;
  readonly rangeKm?: number;
  readonly verdict: string;
  readonly cause: string;
  readonly evidence: string;
  /** Why a number is missing. */
  readonly reason?: string;
}

/** What the gauges in use and its neighbours make of a radar. */
export interface ReportRadarVerdict {
  readonly radarId: string;
  readonly verdict: string;
  /** Empty where nothing asks for one. */
  readonly cause: string;
  readonly sentence: string;
}

/** A point that figures are asked for. */
export interface ReportAsset {
  readonly id: string;
  readonly name?: string;
  /** In the grid's coordinates, metres. */
  readonly xM: number;
  readonly yM: number;
  /** Of the cell that holds it. */
  readonly depth?: DepthFigure;
  /** Shallowest and deepest of the nine cells about it, mm. */
  readonly range?: DepthRangeFigure;
  readonly nineCells?: { readonly leastMm: number; readonly mostMm: number };
  readonly series?: Hyetograph;
}

/** Longitudes and latitudes at the corners of equal parts of the grid; rows from the north. */
export interface GeographicLattice {
  /** Parts across and down: there is one more corner than parts each way. */
  readonly across: number;
  readonly down: number;
  readonly lonDeg: readonly number[];
  readonly latDeg: readonly number[];
}

export interface ReportCatchment {
  readonly id: string;
  readonly name: string;
  /** In the grid's coordinates, metres: outer ring first, then holes. */
  readonly polygons: readonly (readonly Ring[])[];
  /** The figure that the report stands behind: adjusted where there is one, else radar. */
  readonly depth: DepthFigure;
  readonly radar: DepthFigure;
  readonly adjusted?: DepthFigure;
  readonly maxCell: DepthFigure;
  readonly areaKm2: number;
  /** Bounds of the depth; absent where there is no error model. */
  readonly range?: DepthRangeFigure;
}

/** Depths per step of one side: shape [stepCount] each; depth over the observed part, NaN where none was. */
export interface StepSeries {
  /** "held-out" is adjusted radar as it would be without the gauge that it stands beside. */
  readonly role: "gauge" | "radar" | "adjusted" | "held-out";
  readonly depthMm: ArrayLike<number>;
  readonly observedFraction: ArrayLike<number>;
}

/** Rain against time at one place. Steps are (start, end], from `startEpochMs` on. */
export interface Hyetograph {
  readonly id: string;
  readonly label: string;
  readonly startEpochMs: number;
  readonly stepMs: number;
  /** The first is drawn as bars, the others as lines; small charts show the first two. */
  readonly sides: readonly StepSeries[];
}

/** The district's depth had another relation been chosen. */
export interface RelationFigure {
  readonly name: string;
  readonly a: number;
  readonly b: number;
  readonly regime: string;
  readonly depth: DepthFigure;
  /** True for the relation that the report's figures stand on. */
  readonly inUse: boolean;
}

/** A score with what its words need. */
export interface ReportScore {
  readonly score: Score;
  /** The trade's name, printed where the report has no sentence for the score. */
  readonly title?: string;
  /** For scores of yes and no: the depth from which it counts as rain. */
  readonly thresholdMm?: number;
}

export interface ReportScores {
  /** What was compared: "hourly pairs over the time that both observed". */
  readonly pairs: string;
  readonly radar: readonly ReportScore[];
  /** Scores of cross-validated values; empty where there are none. */
  readonly crossValidated: readonly ReportScore[];
}

/** One line of what the run did to its input, counted. */
export interface AccountLine {
  readonly deed: "left out" | "capped" | "filled" | "flagged" | "corrected" | "assumed";
  readonly what: string;
  readonly count: number;
  /** What is counted: "scans", "gates", "readings". */
  readonly unit: string;
  readonly why: string;
}

export interface ProvenanceInput {
  readonly path: string;
  readonly kind: string;
  readonly sha256: string;
  readonly use: string;
}

/** A setting that is not at its default. */
export interface ChangedSetting {
  /** Its place in the plan: "radars[0].cap.dbz". */
  readonly path: string;
  readonly value: string;
  readonly defaultValue: string;
}

export interface Provenance {
  /** Name and version of what made the run. */
  readonly software: string;
  readonly runDigest: string;
  readonly planDigest: string;
  readonly inputs: readonly ProvenanceInput[];
  readonly changedSettings: readonly ChangedSetting[];
}

/**
 * All that the report says, as plain data.
 *
 * Strings are text from files and people: they are escaped where they are printed. Positions are in the
 * grid's coordinates, because the report knows no projections.
 */
export interface ReportInput {
  readonly title: string;
  readonly reference: string;
  readonly author: string;
  readonly status: "provisional" | "final";
  readonly window: Interval;
  /** Zone of the local clock: "UTC", "UTC+01:00" or an IANA zone. */
  readonly zone: string;
  /** Below this observed share a depth is printed as "at least". */
  readonly minObserved: number;
  readonly headline: {
    /** What the district is called, as a sentence can begin with it: "Saltermoor". */
    readonly place: string;
    readonly depth: DepthFigure;
    readonly basis: "radar" | "adjusted";
    readonly range?: DepthRangeFigure;
  };
  readonly adjustment: AdjustmentStatement;
  readonly crossValidation: CrossValidationStatement;
  /** Absent where the plan names the method. */
  readonly methodChoice?: MethodChoiceStatement;
  /** Most important first. */
  readonly cautions: readonly Caution[];
  /** What the bounds of depths rest on and how far they reach, in sentences; empty or absent where there are none. */
  readonly howSure?: readonly string[];
  readonly grid: Grid;
  /** In the order of their buttons. The first one is shown, or the one named here. */
  readonly layers: readonly MapLayer[];
  readonly shownLayerId?: string;
  /** Intervals that add up to layers of the map: they are there where the page runs its script. */
  readonly frames?: readonly FrameSeries[];
  /** Absent where the grid's place on Earth is not to be told. */
  readonly lattice?: GeographicLattice;
  readonly assets?: readonly ReportAsset[];
  /** How many more assets there are than the page shows. */
  readonly assetsLeftOut?: number;
  readonly radars: readonly ReportRadar[];
  readonly gauges: readonly ReportGauge[];
  readonly radarVerdicts?: readonly ReportRadarVerdict[];
  readonly catchments: readonly ReportCatchment[];
  readonly gaugeHyetographs: readonly Hyetograph[];
  readonly catchmentHyetographs: readonly Hyetograph[];
  readonly relations: readonly RelationFigure[];
  readonly scores: ReportScores;
  /** Absent where the echo went to rain as it was measured. */
  readonly echo?: EchoStatement;
  readonly accounts: readonly AccountLine[];
  readonly provenance: Provenance;
}
