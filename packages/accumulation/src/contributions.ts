import type { Interval } from "@rainreckon/core";
import { FULL_SLACK_MS, type RadarInStep } from "./blend.ts";
import { type Span, spansAt } from "./spans.ts";
import { trapezoidHours } from "./stretch.ts";

/** What a stretch of one radar between two of its scans adds to one step at one cell. */
export interface Contribution extends Omit<Span, "ms">, Interval {
  /** share × (hours0 × rate of layer0 + hours1 × rate of layer1), mm. */
  readonly depthMm: number;
}

/**
 * The parts that the blended depth of a step is the sum of, at one cell: radar by radar, each in time order.
 *
 * It says of one cell what `StepBlender` works out for all, so it must be asked before the layers are released.
 *
 * @param stepIndex - of the step among those of the integrators
 * @returns empty where no radar observed the cell
 */
export function contributionsAt(
  step: Interval,
  stepIndex: number,
  cell: number,
  radars: readonly RadarInStep[],
): Contribution[] {
  const lengthMs = step.endEpochMs - step.startEpochMs;
  const seenMs = radars.map((radar) => radar.step.observedMs[cell]);
  const observing = seenMs.filter((ms) => ms > 0);
  const full = observing.filter((ms) => ms >= lengthMs - FULL_SLACK_MS);
  if (observing.length > 1 && full.length < observing.length) {
    return spansAt(step, stepIndex, cell, radars)
      .map(({ ms, ...span }) => withDepth(span, cell))
      .sort((a, b) => a.radar - b.radar);
  }
  const weights = radars.map(({ step: own }, r) => (seenMs[r] > 0 ? own.weightMs[cell] / seenMs[r] : 0));
  const sum = weights.reduce((total, weight) => total + weight, 0);
  return radars.flatMap(({ integrator }, radar) => {
    if (!(seenMs[radar] > 0)) return [];
    const share = observing.length === 1 ? 1 : weights[radar] / sum;
    return integrator
      .layerStretches(stepIndex, cell)
      .map(({ fromEpochMs, toEpochMs, kind, layer0, layer1 }) => {
        const startEpochMs = Math.max(fromEpochMs, step.startEpochMs);
        const endEpochMs = Math.min(toEpochMs, step.endEpochMs);
        const { hours0, hours1 } = trapezoidHours(fromEpochMs, toEpochMs, startEpochMs, endEpochMs);
        return withDepth(
          { radar, share, kind, startEpochMs, endEpochMs, hours0, hours1, layer0, layer1 },
          cell,
        );
      });
  });
}

function withDepth(part: Omit<Contribution, "depthMm">, cell: number): Contribution {
  const { share, hours0, hours1, layer0, layer1 } = part;
  const depthMm = share * (hours0 * layer0.rateMmPerHour[cell] + hours1 * layer1.rateMmPerHour[cell]);
  return { ...part, depthMm };
}
