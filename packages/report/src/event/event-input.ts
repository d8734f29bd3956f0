import type { Interval } from "@rainreckon/core";
import type { Hyetograph } from "../input.ts";

/** A largest depth as it is printed: never without its duration. */
export interface EventPeak {
  readonly durationMinutes: number;
  /** Finite. */
  readonly depthMm: number;
  /** Ends of its interval, NaN where there is none. */
  readonly p10Mm: number;
  readonly p90Mm: number;
  readonly meanMmPerHour: number;
  readonly startEpochMs: number;
  readonly observedFraction: number;
  readonly lowerBound: boolean;
  readonly atCap: boolean;
  /** "12", "<2", ">100", "≥12"; empty where no table was given, or it tells nothing. */
  readonly years: string;
  /** "8 to 21", by the interval of the depth; empty where there is none. */
  readonly yearsBetween: string;
  /** By the table's own interval. */
  readonly yearsOfTable: string;
}

/** Depths of one return period against duration, as the table has them. */
export interface FrequencyCurve {
  readonly years: number;
  /** Shape [durations] each. */
  readonly durationMinutes: readonly number[];
  readonly depthMm: readonly number[];
}

/** One rain event, in words. */
export interface EventWords extends Interval {
  readonly number: number;
  readonly depth: string;
  readonly details: readonly string[];
  readonly peaks: readonly EventPeak[];
}

/** What a page and its index say of the run. */
export interface EventRunWords {
  readonly title: string;
  readonly status: "provisional" | "final";
  readonly runDigest: string;
  readonly software: string;
  /** Zone of local times. */
  readonly zone: string;
  readonly window: Interval;
  /** Sentences: the rule of events and whose it is; what the windows of the maxima are. */
  readonly rules: readonly string[];
  /** Whose table of return periods, and how it is read; empty where there is none. */
  readonly frequency: readonly string[];
  readonly cautions: readonly string[];
}

/** All that a page of one place says. */
export interface EventPageInput {
  readonly run: EventRunWords;
  readonly id: string;
  readonly name: string;
  /** "asset, one cell of 1 km², 51.2000° N, 4.1000° E". */
  readonly what: string;
  /** "23.4 mm", with all that belongs to it in `headlineDetails`. */
  readonly headline: string;
  readonly headlineDetails: readonly string[];
  readonly rain: Hyetograph;
  readonly peaks: readonly EventPeak[];
  /** Of the gauge itself, where the place is one. */
  readonly gaugePeaks: readonly EventPeak[];
  readonly curves: readonly FrequencyCurve[];
  readonly events: readonly EventWords[];
  readonly notes: readonly string[];
  /** Durations that cannot be told, and why. */
  readonly untold: readonly string[];
}

/** One row of the index. */
export interface EventIndexRow {
  readonly id: string;
  readonly name: string;
  /** Name of the page's file, in the same folder. */
  readonly file: string;
  readonly depth: string;
  readonly events: number;
  /** Largest depths of some durations, in the order of the index. */
  readonly peaks: readonly (EventPeak | undefined)[];
}

/** All that the index of a folder of pages says. */
export interface EventIndexInput {
  readonly run: EventRunWords;
  readonly durationsMinutes: readonly number[];
  readonly rows: readonly EventIndexRow[];
  /** How many places are bound to meet each period in a year; undefined where there is no table. */
  readonly exceedances:
    | {
        readonly words: string;
        readonly rows: readonly {
          readonly years: string;
          readonly expected: string;
          readonly seen: number;
        }[];
      }
    | undefined;
  /** Depth by area and duration; undefined where it never rained. */
  readonly areaDuration:
    | {
        readonly words: readonly string[];
        readonly areasKm2: readonly number[];
        readonly rows: readonly { readonly durationMinutes: number; readonly depthMm: readonly number[] }[];
      }
    | undefined;
}
