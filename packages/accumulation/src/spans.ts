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

/** What one radar says in a span, before it is shared out. */
type Saying = Omit<Span, "share" | "ms">;

/** Cuts a step at one cell; see {@link SpanCutter}. */
export function spansAt(
  step: Interval,
  stepIndex: number,
  cell: number,
  radars: readonly RadarInStep[],
): Span[] {
  return new SpanCutter(step, stepIndex, radars).at(cell);
}

/**
 * Cuts a step where any radar's view of a cell begins, ends or bends, and shares out each span by weight.
 * Cells that are seen alike lie beside each other, so the last cut is kept.
 */
export class SpanCutter {
  readonly #step: Interval;
  readonly #stepIndex: number;
  readonly #radars: readonly RadarInStep[];
  #stretches: readonly (readonly LayerStretch[])[] = [];
  #cuts: readonly (readonly Saying[])[] = [];

  /** @param stepIndex - of the step among those of the integrators */
  constructor(step: Interval, stepIndex: number, radars: readonly RadarInStep[]) {
    this.#step = step;
    this.#stepIndex = stepIndex;
    this.#radars = radars;
  }

  /** @returns in time order; within a span in the order of the radars */
  at(cell: number): Span[] {
    const stretches = this.#radars.map(({ integrator }) => integrator.layerStretches(this.#stepIndex, cell));
    if (stretches.some((ofRadar, r) => ofRadar !== this.#stretches[r])) {
      this.#stretches = stretches;
      this.#cuts = cutsOf(this.#step, stretches);
    }
    const weights = this.#radars.map((radar) => radar.step.weightMs[cell] / radar.step.observedMs[cell]);
    const spans: Span[] = [];
    for (const sayings of this.#cuts) {
      let sum = 0;
      for (const { radar } of sayings) sum += weights[radar];
      for (const saying of sayings) {
        const share = weights[saying.radar] / sum;
        const { startEpochMs, endEpochMs, radar, kind, hours0, hours1, layer0, layer1 } = saying;
        const ms = share * (endEpochMs - startEpochMs);
        spans.push({ startEpochMs, endEpochMs, radar, share, ms, kind, hours0, hours1, layer0, layer1 });
      }
    }
    return spans;
  }
}

/** What the radars say in each span of a step over which the same ones speak. */
function cutsOf(step: Interval, stretches: readonly (readonly LayerStretch[])[]): Saying[][] {
  const borders = [step.startEpochMs, step.endEpochMs];
  for (const ofRadar of stretches) {
    for (const { fromEpochMs, toEpochMs } of ofRadar) {
      if (fromEpochMs > step.startEpochMs && fromEpochMs < step.endEpochMs) borders.push(fromEpochMs);
      if (toEpochMs > step.startEpochMs && toEpochMs < step.endEpochMs) borders.push(toEpochMs);
    }
  }
  borders.sort((a, b) => a - b);
  return borders.slice(1).flatMap((endEpochMs, k) => {
    const startEpochMs = borders[k];
    if (startEpochMs === endEpochMs) return [];
    const sayings = stretches.flatMap((ofRadar, radar): Saying[] => {
      const stretch = stretchOver(ofRadar, startEpochMs, endEpochMs);
      if (stretch === undefined) return [];
      const { fromEpochMs, toEpochMs, layer0, layer1, kind } = stretch;
      const { hours0, hours1 } = trapezoidHours(fromEpochMs, toEpochMs, startEpochMs, endEpochMs);
      return [{ startEpochMs, endEpochMs, radar, kind, hours0, hours1, layer0, layer1 }];
    });
    return [sayings];
  });
}

function stretchOver(stretches: readonly LayerStretch[], from: number, to: number): LayerStretch | undefined {
  return stretches.find(({ fromEpochMs, toEpochMs }) => fromEpochMs <= from && toEpochMs >= to);
}
