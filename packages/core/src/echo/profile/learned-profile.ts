import type { LayerHeights, VerticalProfile } from "./vertical-profile.ts";

/** How a melting layer shows in the correlation of the two polarisations. */
export interface MeltingCorrelation {
  /** RHOHV of rain below the layer. */
  readonly inRain: number;
  /** By how much it falls where the whole beam is in the layer. */
  readonly drop: number;
}

/** A melting layer, heights above mean sea level. */
export interface MeltingLayer extends LayerHeights {
  /** From the scans, or from the freezing height of the plan. */
  readonly basis: "scans" | "plan";
  /** One standard deviation of the height of its middle. */
  readonly uncertaintyM: number;
  /** Undefined where RHOHV is missing or does not tell. */
  readonly correlation?: MeltingCorrelation | undefined;
}

/** What the run taught about the vertical profile: plain, small and clonable. */
export interface LearnedProfile {
  /** "measured": fitted to the scans; "idealised": common practice about a known layer; "none": nothing is corrected. */
  readonly basis: "measured" | "idealised" | "none";
  /** Why it is so, as the end of a sentence. */
  readonly reason: string;
  readonly layer?: MeltingLayer | undefined;
  readonly profile?: VerticalProfile | undefined;
  /** Share of the rain told to be convective that follows the profile nevertheless, 0 to 1; undefined if not measured. */
  readonly convectiveShare?: number | undefined;
  /** Pairs of elevation and range band that the fit had, and what it leaves unexplained (root mean square). */
  readonly pairCount: number;
  readonly misfitDb: number;
}
