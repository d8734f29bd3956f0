import type { Interval } from "@rainreckon/core";

/**
 * Depths given for one set of steps, told for another, with no water gained or lost: a new step gets the whole of each
 * old one inside it, and of one that it cuts the share of its time, as if rain were even within a step.
 *
 * @param steps - shape [n], in order of time, without overlap
 * @param depthMm - shape [n]: mm in each step; NaN is not observed
 * @param wanted - shape [m], in order of time, without overlap
 * @returns shape [m]: mm; NaN where any part of the new step was not observed, or lies outside the old ones: a part is
 *   no depth of the whole
 */
export function changeSteps(
  steps: readonly Interval[],
  depthMm: ArrayLike<number>,
  wanted: readonly Interval[],
): Float64Array {
  const told = new Float64Array(wanted.length);
  let first = 0;
  for (const [index, { startEpochMs, endEpochMs }] of wanted.entries()) {
    while (first < steps.length && steps[first].endEpochMs <= startEpochMs) first++;
    let depth = 0;
    let coveredMs = 0;
    for (let k = first; k < steps.length && steps[k].startEpochMs < endEpochMs; k++) {
      const step = steps[k];
      const sharedMs = Math.min(step.endEpochMs, endEpochMs) - Math.max(step.startEpochMs, startEpochMs);
      depth += (depthMm[k] * sharedMs) / (step.endEpochMs - step.startEpochMs);
      coveredMs += sharedMs;
    }
    told[index] = coveredMs === endEpochMs - startEpochMs ? depth : Number.NaN;
  }
  return told;
}

/**
 * A series rounded so that its sum is the rounded sum: what one value loses goes to the next, by rounding the running
 * total. No value is off by more than one unit of the last digit, and what is not observed keeps its place.
 *
 * @param decimals - digits after the point, 0 to 12
 */
export function roundKeepingSum(values: ArrayLike<number>, decimals: number): Float64Array {
  const scale = 10 ** decimals;
  const rounded = new Float64Array(values.length);
  let running = 0;
  let given = 0;
  for (let k = 0; k < values.length; k++) {
    if (Number.isNaN(values[k])) {
      rounded[k] = Number.NaN;
      continue;
    }
    running += values[k];
    // The product is nudged, as sums of decimals end a hair below the half that they mean.
    const units = Math.round(running * scale * (1 + Number.EPSILON));
    rounded[k] = (units - given) / scale;
    given = units;
  }
  return rounded;
}
