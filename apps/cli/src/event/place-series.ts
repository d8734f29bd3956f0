import type { RainSeries, StepRange } from "@rainreckon/accumulation";
import type { GaugeInput } from "../total/gauges.ts";
import type { PlaceReport } from "./schema.ts";

/** One in ten truths lies below the one, one in ten above the other. */
export interface DepthEnds {
  readonly p10Mm: number | null;
  readonly p90Mm: number | null;
}

export const NO_ENDS: DepthEnds = { p10Mm: null, p90Mm: null };

/** A place with its rain by steps, wherever the steps come from. */
export interface PlaceSeries {
  readonly kind: PlaceReport["kind"];
  readonly id: string;
  readonly name: string;
  readonly latDeg: number | null;
  readonly lonDeg: number | null;
  readonly areaKm2: number;
  readonly figure: PlaceReport["figure"];
  readonly from: PlaceReport["from"];
  readonly exact: boolean | null;
  /** The figure to use. */
  readonly best: RainSeries;
  /** Shape [steps]; NaN where not known. */
  readonly radarMm: Float64Array;
  /** How sure the depth of some steps is; all null where the run does not say. */
  readonly rangeOf: (steps: StepRange, depthMm: number) => DepthEnds;
  readonly window: Omit<PlaceReport["window"], "lowerBound">;
  /** With its own readings, in the same steps. */
  readonly gauge:
    | { readonly verdict: string; readonly readings: RainSeries; readonly input: GaugeInput }
    | undefined;
  readonly notes: readonly string[];
}

/** A depth seen to a smaller share than this is called a lower bound. House rule: what rounds to less than 100 %. */
const WHOLE = 0.995;

/** Whether a depth is at least what it says: seen in part, or at the cap. */
export function isLowerBound({
  observedFraction,
  atCap,
}: {
  readonly observedFraction: number;
  readonly atCap: boolean;
}): boolean {
  return observedFraction < WHOLE || atCap;
}
