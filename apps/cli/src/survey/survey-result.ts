import type { Findings } from "./findings.ts";
import type { GridSource } from "./grid-sources.ts";
import type { FoundFile } from "./walk.ts";

/** A position on the earth, WGS 84. */
export interface Point {
  readonly lonDeg: number;
  readonly latDeg: number;
}

/** What a survey knows beyond what it prints. */
export interface SurveyResult {
  readonly findings: Findings;
  readonly files: readonly FoundFile[];
  /** Radars whose time belongs to the window, by id; the others are of another storm, or have one round only. */
  readonly radarsInWindow: ReadonlySet<string>;
  /** Gridded rain, by what makes one entry of a plan. */
  readonly gridSources: readonly GridSource[];
  /** Where gauges stand, those beyond the reach of every radar left out. */
  readonly gaugePoints: readonly Point[];
  /** Corners of the catchments. */
  readonly catchmentPoints: readonly Point[];
}
