import type { RainSeries, StepRange } from "@rainreckon/accumulation";
import { varianceOfMean } from "@rainreckon/adjustment";
import { type DepthEnds, NO_ENDS, type PlaceSeries } from "./place-series.ts";

const HOUR_MS = 3_600_000;

/** Ends of a depth as logarithms over it: their middle, and half of their distance. */
interface LogEnds {
  readonly middle: number;
  readonly reach: number;
}

/**
 * Ranges of depths over any duration, from those that the tables of a run have: of its steps and of its window. Between
 * them the variance goes as that of the mean of errors that are forgotten within an hour or last, which is how the run
 * made both; the steps speak by the deepest one.
 *
 * @param ends - shapes [steps]; NaN where the run does not say
 */
export function storedRange(
  { depthMm, stepMs }: RainSeries,
  ends: { readonly p10Mm: Float64Array; readonly p90Mm: Float64Array },
  window: { readonly depthMm: number; readonly p10Mm: number; readonly p90Mm: number },
): PlaceSeries["rangeOf"] {
  const ofWindow = logEnds(window.depthMm, window.p10Mm, window.p90Mm);
  const part = (lengthMs: number) => varianceOfMean(lengthMs / HOUR_MS);
  const [short, long] = [part(stepMs), part(stepMs * depthMm.length)];
  return ({ from, to }: StepRange, mm: number): DepthEnds => {
    let deepest = from;
    for (let k = from; k < to; k++) if (depthMm[k] > (depthMm[deepest] || 0)) deepest = k;
    const ofStep = logEnds(depthMm[deepest], ends.p10Mm[deepest], ends.p90Mm[deepest]);
    if (ofWindow === undefined || ofStep === undefined || !(mm > 0)) return NO_ENDS;
    const share = short > long ? (part(stepMs * (to - from)) - long) / (short - long) : 0;
    const middle = ofWindow.middle + share * (ofStep.middle - ofWindow.middle);
    const reach = Math.sqrt(ofWindow.reach ** 2 + share * (ofStep.reach ** 2 - ofWindow.reach ** 2));
    return { p10Mm: mm * Math.exp(middle - reach), p90Mm: mm * Math.exp(middle + reach) };
  };
}

function logEnds(mm: number, p10Mm: number, p90Mm: number): LogEnds | undefined {
  if (!(mm > 0 && p10Mm > 0 && p90Mm >= p10Mm)) return undefined;
  const [low, high] = [Math.log(p10Mm / mm), Math.log(p90Mm / mm)];
  return { middle: (low + high) / 2, reach: (high - low) / 2 };
}
