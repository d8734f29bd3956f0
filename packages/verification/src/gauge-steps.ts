import {
  type GaugeDepth,
  type GaugeSeries,
  type Interval,
  QUALITY_DOUBT,
  QUALITY_DROP,
} from "@rainreckon/core";

/** How readings that the network itself doubts are treated. They are counted either way. */
export type DoubtedReadings = "keep" | "drop";

/** What a gauge measured, step by step, and what had to be done to say so. */
export interface GaugeSteps {
  readonly startEpochMs: number;
  readonly stepMs: number;
  /** Shape [count]: depth over the observed part of (start, end] of the step; NaN where nothing was observed. */
  readonly depthMm: Float64Array;
  /** Shape [count]: share of the step that usable readings cover, 0 to 1. */
  readonly observedFraction: Float64Array;
  /** Shape [count]: share of the step that rests on kept readings which the network doubts. */
  readonly doubtedFraction: Float64Array;
  /** Depth inside the window that came from readings crossing a border, and was shared out by time. */
  readonly splitMm: number;
  /** Time that two readings claim; it counts once, their depths both count. */
  readonly overlapMs: number;
  /** Readings touching the window that could not be used, by cause. */
  readonly unusable: { readonly missing: number; readonly dropped: number; readonly impossible: number };
}

/**
 * Depths of a gauge on regular steps (start, end].
 *
 * A reading stamped exactly on a border belongs to the step ending there. A reading that crosses a
 * border is shared out in proportion to time, and its depth counted in `splitMm`. Readings that are
 * NaN, that the network says to drop, or that are negative or infinite are not observed time.
 *
 * @param series - readings in time order
 * @param startEpochMs - start of the first step
 * @param stepMs - length of a step, above 0
 * @param count - number of steps, at least 1
 * @param doubted - whether readings of doubtful quality are kept (and flagged) or left out
 * @throws RangeError if `stepMs` or `count` is not positive
 */
export function gaugeSteps(
  series: GaugeSeries,
  startEpochMs: number,
  stepMs: number,
  count: number,
  doubted: DoubtedReadings = "keep",
): GaugeSteps {
  if (!(stepMs > 0) || !(Number.isInteger(count) && count >= 1)) {
    throw new RangeError(`gauge steps need a step above 0 and a whole count, got ${stepMs} ms and ${count}`);
  }
  const windowEndMs = startEpochMs + stepMs * count;
  const depthMm = new Float64Array(count);
  const observedMs = new Float64Array(count);
  const doubtedMs = new Float64Array(count);
  const unusable = { missing: 0, dropped: 0, impossible: 0 };
  let splitMm = 0;
  let overlapMs = 0;
  let coveredUntilMs = Number.NEGATIVE_INFINITY;

  const first = firstEndingAfter(series.endEpochMs, startEpochMs);
  for (let i = first; i < series.endEpochMs.length && series.startEpochMs[i] < windowEndMs; i++) {
    const fromMs = series.startEpochMs[i];
    const untilMs = series.endEpochMs[i];
    const reading = series.depthMm[i];
    const cause = whyUnusable(reading, series.quality[i], doubted);
    if (cause !== undefined) {
      unusable[cause]++;
      continue;
    }
    // A reading without length covers no time: its whole depth falls into the step that it ends.
    if (untilMs <= fromMs) {
      const step = Math.ceil((untilMs - startEpochMs) / stepMs) - 1;
      if (step >= 0 && step < count) depthMm[step] += reading;
      continue;
    }
    const claimedFromMs = Math.max(fromMs, coveredUntilMs);
    overlapMs += Math.max(0, Math.min(coveredUntilMs, untilMs) - Math.max(fromMs, startEpochMs));
    coveredUntilMs = Math.max(coveredUntilMs, untilMs);

    const firstStep = Math.max(0, Math.floor((fromMs - startEpochMs) / stepMs));
    const lastStep = Math.min(count - 1, Math.ceil((untilMs - startEpochMs) / stepMs) - 1);
    const whole =
      firstStep === lastStep &&
      fromMs >= startEpochMs + firstStep * stepMs &&
      untilMs <= startEpochMs + (firstStep + 1) * stepMs;
    for (let step = firstStep; step <= lastStep; step++) {
      const stepStartMs = startEpochMs + step * stepMs;
      const stepEndMs = stepStartMs + stepMs;
      const insideMs = Math.min(untilMs, stepEndMs) - Math.max(fromMs, stepStartMs);
      const part = whole ? reading : (reading * insideMs) / (untilMs - fromMs);
      depthMm[step] += part;
      if (!whole) splitMm += part;
      const newMs = Math.max(0, Math.min(untilMs, stepEndMs) - Math.max(claimedFromMs, stepStartMs));
      observedMs[step] += newMs;
      if (series.quality[i] === QUALITY_DOUBT) doubtedMs[step] += newMs;
    }
  }

  const observedFraction = observedMs.map((ms) => ms / stepMs);
  const doubtedFraction = doubtedMs.map((ms) => ms / stepMs);
  for (let step = 0; step < count; step++) {
    if (observedFraction[step] === 0) depthMm[step] = Number.NaN;
  }
  return { startEpochMs, stepMs, depthMm, observedFraction, doubtedFraction, splitMm, overlapMs, unusable };
}

/** What a gauge saw of one interval: the same rules as {@link gaugeSteps}. */
export function gaugeDepth(
  series: GaugeSeries,
  interval: Interval,
  doubted: DoubtedReadings = "keep",
): GaugeDepth {
  const lengthMs = interval.endEpochMs - interval.startEpochMs;
  const steps = gaugeSteps(series, interval.startEpochMs, lengthMs, 1, doubted);
  return { depthMm: steps.depthMm[0], observedFraction: steps.observedFraction[0] };
}

function whyUnusable(
  depthMm: number,
  quality: number,
  doubted: DoubtedReadings,
): "missing" | "dropped" | "impossible" | undefined {
  if (Number.isNaN(depthMm)) return "missing";
  if (quality === QUALITY_DROP || (quality === QUALITY_DOUBT && doubted === "drop")) return "dropped";
  if (depthMm < 0 || !Number.isFinite(depthMm)) return "impossible";
  return undefined;
}

/** Index of the first reading that ends after an instant; ends ascend. */
function firstEndingAfter(endEpochMs: Float64Array, instantMs: number): number {
  let low = 0;
  let high = endEpochMs.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (endEpochMs[middle] > instantMs) high = middle;
    else low = middle + 1;
  }
  return low;
}
