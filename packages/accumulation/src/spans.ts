import type { Interval } from "@rainreckon/core";
import type { RateLayer } from "@rainreckon/mosaic";
import type { RadarInStep } from "./blend.ts";
import type { LayerStretch } from "./integrate.ts";
import { type Stretch, trapezoidHours } from "./stretch.ts";

/** What one radar says in a part of a step over which the same radars see a cell. */
export interface Span extends Interval {
  /** Index of the radar. */
  readonly radar: number;
  /** Its share of the span by weight. */
  readonly share: number;
  /** That share in milliseconds. */
  readonly ms: number;
  readonly kind: Stretch["kind"];
  /** What the rates of the two layers count for, before the share. */
  readonly hours0: number;
  readonly hours1: number;
  readonly layer0: RateLayer;
  readonly layer1: RateLayer;
}

/**
 * Cuts a step where any radar's view of a cell begins, ends or bends, and shares out each span by weight.
 *
 * @returns in time order; within a span in the order of the radars
 */
export function spansAt(
  step: Interval,
  stepIndex: number,
  cell: number,
  radars: readonly RadarInStep[],
): Span[] {
  const stretches = radars.map(({ integrator }) => integrator.layerStretches(stepIndex, cell));
  const weights = radars.map((radar) => radar.step.weightMs[cell] / radar.step.observedMs[cell]);
  const borders = [step.startEpochMs, step.endEpochMs];
  for (const ofRadar of stretches) {
    for (const { fromEpochMs, toEpochMs } of ofRadar) {
      if (fromEpochMs > step.startEpochMs && fromEpochMs < step.endEpochMs) borders.push(fromEpochMs);
      if (toEpochMs > step.startEpochMs && toEpochMs < step.endEpochMs) borders.push(toEpochMs);
    }
  }
  borders.sort((a, b) => a - b);
  const spans: Span[] = [];
  for (let k = 0; k + 1 < borders.length; k++) {
    const [from, to] = [borders[k], borders[k + 1]];
    if (from === to) continue;
    const speaking = stretches.map((ofRadar) => stretchOver(ofRadar, from, to));
    let sum = 0;
    for (let r = 0; r < speaking.length; r++) if (speaking[r] !== undefined) sum += weights[r];
    for (let radar = 0; radar < speaking.length; radar++) {
      const stretch = speaking[radar];
      if (stretch === undefined) continue;
      const { fromEpochMs, toEpochMs, layer0, layer1, kind } = stretch;
      const { hours0, hours1 } = trapezoidHours(fromEpochMs, toEpochMs, from, to);
      const share = weights[radar] / sum;
      const span = { startEpochMs: from, endEpochMs: to, radar, share, ms: share * (to - from) };
      spans.push({ ...span, kind, hours0, hours1, layer0, layer1 });
    }
  }
  return spans;
}

function stretchOver(stretches: readonly LayerStretch[], from: number, to: number): LayerStretch | undefined {
  return stretches.find(({ fromEpochMs, toEpochMs }) => fromEpochMs <= from && toEpochMs >= to);
}
