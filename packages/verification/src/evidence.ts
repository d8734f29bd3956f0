import type { GaugeSeries, Interval, Pair } from "@rainreckon/core";
import type { RadarSteps } from "./pairs.ts";

/** What a person decided about a gauge, against any check. */
export interface GaugeOverride {
  readonly verdict: "use" | "leave-out";
  readonly reason: string;
  /** Who decided, and when, as YYYY-MM-DD. */
  readonly by: string;
  readonly date: string;
}

/**
 * How well the radars see the place of a gauge, from the planes of a run; NaN where not known. Means and shares
 * are by depth unless told otherwise.
 */
export interface RadarSight {
  readonly beamHeightAslM: number;
  /** Of the radar that speaks loudest: its antenna above the sea, and the direction in which it sees the gauge, from north. */
  readonly antennaAslM: number;
  readonly azimuthDeg: number;
  /** Share of the beam that terrain takes, mean by time. */
  readonly blockedFraction: number;
  readonly blockageCorrectionDb: number;
  readonly attenuationCorrectionDb: number;
  /** Estimated two-way loss of rain and air. */
  readonly twoWayLossDb: number;
  readonly profileCorrectionDb: number;
  readonly meltingFraction: number;
  readonly snowFraction: number;
  readonly hailFraction: number;
  readonly convectiveFraction: number;
  readonly cappedFraction: number;
  /** Share of the depth from gates that were screened and filled. */
  readonly filledFraction: number;
  /** What all screens together took away, mm. */
  readonly screenedMm: number;
  /** The most that may have fallen unseen for want of sensitivity, mm. */
  readonly unseenMm: number;
  /** Shares of the window: observed, bridged between scans too far apart, borrowed at an end. */
  readonly observedFraction: number;
  readonly bridgedFraction: number;
  readonly edgeFraction: number;
}

/** Radar depths on base steps at places spread over the map, to look for a better one for a gauge. */
export interface FieldSamples {
  readonly startEpochMs: number;
  readonly stepMs: number;
  /** Shape [places]: in the plane of the grid, km. */
  readonly xKm: Float64Array;
  readonly yKm: Float64Array;
  /** Shape [places][steps]: mm; NaN where not observed. */
  readonly depthMm: readonly (Float64Array | Float32Array)[];
}

/** What is known of one gauge. Plain data: nothing here depends on files or on the other gauges. */
export interface GaugeEvidence {
  readonly series: GaugeSeries;
  /** Over the whole window and by interval, as `makePairs` gives them. */
  readonly whole: Pair;
  readonly byInterval: readonly Pair[];
  /** In the plane of the grid, km. */
  readonly xKm: number;
  readonly yKm: number;
  /** The radar over the gauge, on base steps. */
  readonly radar: RadarSteps;
  readonly sight: RadarSight;
  /** Whether the gauge is heated; undefined where nobody says. */
  readonly heated?: boolean;
  /** What was wrong with the rows of its files and has been settled: stamps given twice, resets, readings that cannot be. */
  readonly rowFaults?: {
    readonly duplicateRows: number;
    readonly counterResets: number;
    readonly impossible: number;
  };
  readonly override?: GaugeOverride;
}

/** What all gauges are judged with. */
export interface JudgeContext {
  readonly window: Interval;
  /** Without it no gauge can be told to be misplaced. */
  readonly field?: FieldSamples;
}
