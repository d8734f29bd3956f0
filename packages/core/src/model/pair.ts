import type { Interval } from "./interval.ts";

/** One gauge beside its radar cell over one interval, both over the time that both observed. */
export interface Pair extends Interval {
  readonly network: string;
  readonly gaugeId: string;
  readonly gaugeMm: number;
  readonly radarMm: number;
  /** Radar that carries most of the weight at the gauge. */
  readonly radarId: string;
  /** Shares of the whole interval that each side observed; and that both did. */
  readonly gaugeObservedFraction: number;
  readonly radarObservedFraction: number;
  readonly commonFraction: number;
  readonly rangeKm: number;
  readonly beamHeightAslM: number;
  /** False where the pair takes no part in scores; `reason` says why. */
  readonly used: boolean;
  readonly reason: string;
}

/** A score with all that is needed to read it. */
export interface Score {
  readonly name: string;
  /** NaN where undefined; `reason` then says why. */
  readonly value: number;
  readonly unit: string;
  readonly best: number;
  readonly definition: string;
  readonly n: number;
  readonly dropped: number;
  readonly reason?: string;
  /** Intervals of confidence, by what was resampled; null with a reason where they cannot be had. */
  readonly intervals?: Readonly<Record<"timeBlocks" | "gauges", ScoreInterval>>;
}

export interface ScoreInterval {
  readonly low: number;
  readonly high: number;
  readonly level: number;
  readonly reason?: string;
}
