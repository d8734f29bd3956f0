import { type Interval, MS_PER_HOUR } from "@rainreckon/core";
import type { CompanionKind, CompanionValue, RateLayer } from "@rainreckon/mosaic";

/** A stretch between two scans is called bridged when it is longer than this many median rounds: a scan is missing. */
export const BRIDGED_ABOVE_ROUNDS = 1.5;

/** How one radar's scans may speak for the time around them. */
export interface TimeRules {
  readonly medianRoundMs: number;
  /** Longest stretch between two scans that is bridged; equality bridges. */
  readonly maxGapMs: number;
}

/** What the fields of a run are made of. */
export interface FieldShape {
  readonly cellCount: number;
  /** Flat indices, ascending, of the cells at which depths under other relations are kept. */
  readonly headlineCells: Int32Array;
  /** How many other relations. */
  readonly variantCount: number;
  /** What travels with the rain; nothing where left out. */
  readonly companions?: readonly CompanionValue[] | undefined;
}

/** What one radar saw in one step. Shapes [cells]; undefined arrays are zero everywhere. */
export interface RadarStep {
  /** Depth over the time observed; meaningless where observedMs is 0. */
  readonly depthMm: Float64Array;
  readonly observedMs: Float32Array;
  /** Part of observedMs that lies in bridged gaps, and before the first or after the last scan. */
  bridgedMs: Float32Array | undefined;
  edgeMs: Float32Array | undefined;
  /** Part of depthMm that came from gates at the cap. */
  cappedMm: Float32Array | undefined;
  /** Beam height and blend weight times the milliseconds they held. */
  readonly heightMMs: Float32Array;
  readonly weightMs: Float32Array;
  /** Shape [variants][headline cells]: depth under other relations. */
  readonly variantMm: readonly Float64Array[];
  /**
   * Shape [companions][cells], undefined where 0 everywhere: hours times what a layer holds of it. A toll is the
   * rate of a round times half a median round on either side of its first sweep, whoever observed the cell.
   */
  readonly companions: (Float32Array | undefined)[];
}

/** A part of a stretch between two samples that falls into one step; weights in hours. */
interface Part {
  readonly step: number;
  readonly hours0: number;
  readonly hours1: number;
  readonly ms: number;
}

/** A stretch of time a radar speaks for at one cell, with its rates at both ends. */
export interface Stretch {
  readonly fromEpochMs: number;
  readonly toEpochMs: number;
  readonly rate0: number;
  readonly rate1: number;
  /** bridged: a scan is missing in it; edge: before the first scan or after the last. */
  readonly kind: "usual" | "bridged" | "edge";
}

/** How a layer stands to the others of its source. */
export interface LayerPlace {
  /** Whether this is the source's first or last round of the whole run, which speaks for half a round beyond. */
  readonly isFirst: boolean;
  readonly isLast: boolean;
  /** True where nothing speaks for the time between the layer before and this one, however short it is. */
  readonly startsAnew?: boolean;
}

interface HeldLayer extends RateLayer, LayerPlace {}

/** Depth of a linear change of rate over [from, to] inside [start, end]: the trapezoid of its ends. */
function trapezoidHours(
  start: number,
  end: number,
  from: number,
  to: number,
): { hours0: number; hours1: number; ms: number } {
  const ms = to - from;
  const length = end - start;
  const middle = length > 0 ? (from + to - 2 * start) / (2 * length) : 0.5;
  return { hours0: (ms * (1 - middle)) / MS_PER_HOUR, hours1: (ms * middle) / MS_PER_HOUR, ms };
}

/** Depth in mm of a stretch over its part in (from, to]. */
export function stretchDepthMm(stretch: Stretch, from: number, to: number): number {
  const { hours0, hours1 } = trapezoidHours(stretch.fromEpochMs, stretch.toEpochMs, from, to);
  return hours0 * stretch.rate0 + hours1 * stretch.rate1;
}

/**
 * Integrates the rate layers of ONE radar over time, cell by cell, on the mid-times of the sweeps that
 * spoke there: trapezoids between successive samples, exact at the borders of steps.
 *
 * A stretch up to `maxGapMs` is bridged; a longer one is not observed, and nothing speaks into it.
 * The very first round speaks for half a median round before it, the very last one after it.
 * Layers are handed in once, in time order; memory holds the open steps and the layers near them.
 */
export class RadarIntegrator {
  readonly #steps: readonly Interval[];
  readonly #rules: TimeRules;
  readonly #headlineCells: Int32Array;
  readonly #variantCount: number;
  readonly #companionKinds: readonly CompanionKind[];
  readonly #cellCount: number;
  readonly #open = new Map<number, RadarStep>();
  readonly #layers: (HeldLayer | undefined)[] = [];
  /** Number of the layer that last spoke for a cell; -1 none. */
  readonly #previous: Int32Array;
  #taken = 0;
  #released = 0;
  /** The stretch asked about last, and its parts; forgotten whenever a layer is added, since steps may have been taken. */
  #partsFrom = Number.NaN;
  #partsTo = Number.NaN;
  #parts: readonly Part[] = [];

  /** @param steps - contiguous, in time order */
  constructor(steps: readonly Interval[], rules: TimeRules, shape: FieldShape) {
    this.#steps = steps;
    this.#rules = rules;
    this.#cellCount = shape.cellCount;
    this.#headlineCells = shape.headlineCells;
    this.#variantCount = shape.variantCount;
    this.#companionKinds = (shape.companions ?? []).map(({ kind }) => kind);
    this.#previous = new Int32Array(shape.cellCount).fill(-1);
  }

  add(layer: RateLayer, place: LayerPlace): void {
    const number = this.#layers.length;
    if (place.startsAnew === true) this.#previous.fill(-1);
    const held: HeldLayer = { ...layer, ...place };
    this.#layers.push(held);
    const previousLayer = number > 0 ? this.#layers[number - 1] : undefined;
    const { rateMmPerHour, slot, sweepMidEpochMs, cappedRateMmPerHour, beamHeightAslM, weight } = layer;
    const { medianRoundMs, maxGapMs } = this.#rules;
    const bridgedAboveMs = BRIDGED_ABOVE_ROUNDS * medianRoundMs;

    this.#partsFrom = Number.NaN;
    for (let cell = 0; cell < this.#cellCount; cell++) {
      const rate1 = rateMmPerHour[cell];
      if (!(rate1 >= 0)) continue;
      const to = sweepMidEpochMs[slot === undefined ? 0 : slot[cell]];
      if (place.isFirst) this.#addEdge(cell, to - medianRoundMs / 2, to, held);
      if (place.isLast) this.#addEdge(cell, to, to + medianRoundMs / 2, held);
      const before = this.#previous[cell];
      this.#previous[cell] = number;
      if (before < 0) continue;
      const previous = before === number - 1 ? previousLayer : this.#layers[before];
      // A released layer lies further back than any gap that is bridged.
      if (previous === undefined) continue;
      const from = previous.sweepMidEpochMs[previous.slot === undefined ? 0 : previous.slot[cell]];
      if (to - from > maxGapMs) continue;
      const parts = this.#partsOf(from, to);
      const rate0 = previous.rateMmPerHour[cell];
      const bridged = to - from > bridgedAboveMs;
      for (const { step, hours0, hours1, ms } of parts) {
        const into = this.#stepAt(step);
        into.depthMm[cell] += hours0 * rate0 + hours1 * rate1;
        into.observedMs[cell] += ms;
        into.heightMMs[cell] += (ms * (previous.beamHeightAslM[cell] + beamHeightAslM[cell])) / 2;
        into.weightMs[cell] += (ms * (previous.weight[cell] + weight[cell])) / 2;
        if (bridged) {
          into.bridgedMs ??= new Float32Array(this.#cellCount);
          into.bridgedMs[cell] += ms;
        }
      }
      const capped0 = previous.cappedRateMmPerHour?.[cell] ?? 0;
      const capped1 = cappedRateMmPerHour?.[cell] ?? 0;
      if (capped0 > 0 || capped1 > 0) {
        for (const { step, hours0, hours1 } of parts) {
          const into = this.#stepAt(step);
          into.cappedMm ??= new Float32Array(this.#cellCount);
          into.cappedMm[cell] += hours0 * capped0 + hours1 * capped1;
        }
      }
    }
    for (let variant = 0; variant < this.#variantCount; variant++) this.#addVariant(variant, number);
  }

  /** True once no later layer, whose earliest sample is at `nextEpochMs`, can change a step. */
  isSettled(step: number, nextEpochMs: number): boolean {
    const reachMs = Math.max(this.#rules.maxGapMs, this.#rules.medianRoundMs / 2);
    return nextEpochMs >= this.#steps[step].endEpochMs + reachMs;
  }

  /** Hands over a settled step. Steps are taken in order, each once. */
  take(step: number): RadarStep {
    const taken = this.#stepAt(step);
    this.#open.delete(step);
    this.#taken = step + 1;
    return taken;
  }

  /** Forgets layers that can no longer matter to a step that was not taken yet. */
  release(): void {
    const next = this.#steps[this.#taken];
    const earliest = next === undefined ? Infinity : next.startEpochMs - this.#rules.maxGapMs;
    while (this.#released < this.#layers.length) {
      const layer = this.#layers[this.#released];
      if (layer !== undefined && Math.max(...layer.sweepMidEpochMs) >= earliest) break;
      this.#layers[this.#released++] = undefined;
    }
  }

  /**
   * The stretches that this radar speaks for at one cell and that have a part in a step, in time order.
   * Needed only where two radars observed different parts of a step.
   *
   * @param rateOf - the rate to read: the layer's own or a variant's
   */
  stretches(step: number, cell: number, rateOf: (layer: RateLayer) => number): Stretch[] {
    const { startEpochMs, endEpochMs } = this.#steps[step];
    const { medianRoundMs, maxGapMs } = this.#rules;
    const half = medianRoundMs / 2;
    const found: Stretch[] = [];
    const push = (from: number, to: number, rate0: number, rate1: number, kind: Stretch["kind"]) => {
      if (to <= startEpochMs || from >= endEpochMs) return;
      found.push({ fromEpochMs: from, toEpochMs: to, rate0, rate1, kind });
    };
    let from = Number.NaN;
    let rate0 = Number.NaN;
    for (let n = this.#released; n < this.#layers.length; n++) {
      const layer = this.#layers[n];
      if (layer === undefined) continue;
      if (layer.startsAnew === true) from = Number.NaN;
      const rate = rateOf(layer);
      if (!(rate >= 0)) continue;
      const at = layer.sweepMidEpochMs[layer.slot === undefined ? 0 : layer.slot[cell]];
      if (layer.isFirst) push(at - half, at, rate, rate, "edge");
      const bridged = at - from > BRIDGED_ABOVE_ROUNDS * medianRoundMs;
      if (at - from <= maxGapMs) push(from, at, rate0, rate, bridged ? "bridged" : "usual");
      if (layer.isLast) push(at, at + half, rate, rate, "edge");
      from = at;
      rate0 = rate;
    }
    return found;
  }

  #addEdge(cell: number, from: number, to: number, layer: HeldLayer): void {
    const rate = layer.rateMmPerHour[cell];
    for (const { step, hours0, hours1, ms } of this.#partsOf(from, to)) {
      const into = this.#stepAt(step);
      into.depthMm[cell] += (hours0 + hours1) * rate;
      into.observedMs[cell] += ms;
      into.heightMMs[cell] += ms * layer.beamHeightAslM[cell];
      into.weightMs[cell] += ms * layer.weight[cell];
      into.edgeMs ??= new Float32Array(this.#cellCount);
      into.edgeMs[cell] += ms;
      const capped = layer.cappedRateMmPerHour?.[cell] ?? 0;
      if (capped > 0) {
        into.cappedMm ??= new Float32Array(this.#cellCount);
        into.cappedMm[cell] += (hours0 + hours1) * capped;
      }
    }
  }

  /** Depths under another relation: the same stretches again, at the headline cells only. */
  #addVariant(variant: number, number: number): void {
    const layer = this.#layers[number] as HeldLayer;
    const half = this.#rules.medianRoundMs / 2;
    for (let h = 0; h < this.#headlineCells.length; h++) {
      const cell = this.#headlineCells[h];
      const rate1 = layer.variants[variant][h];
      if (!(rate1 >= 0)) continue;
      const to = layer.sweepMidEpochMs[layer.slot === undefined ? 0 : layer.slot[cell]];
      const put = (from: number, until: number, rate0: number, rateEnd: number) => {
        for (const { step, hours0, hours1 } of this.#partsOf(from, until)) {
          this.#stepAt(step).variantMm[variant][h] += hours0 * rate0 + hours1 * rateEnd;
        }
      };
      if (layer.isFirst) put(to - half, to, rate1, rate1);
      if (layer.isLast) put(to, to + half, rate1, rate1);
      for (let n = number - 1; n >= this.#released && this.#layers[n + 1]?.startsAnew !== true; n--) {
        const previous = this.#layers[n];
        const rate0 = previous?.variants[variant][h] ?? Number.NaN;
        if (previous === undefined || !(rate0 >= 0)) continue;
        const from = previous.sweepMidEpochMs[previous.slot === undefined ? 0 : previous.slot[cell]];
        if (to - from <= this.#rules.maxGapMs) put(from, to, rate0, rate1);
        break;
      }
    }
  }

  /** The parts of a stretch in the open steps. Most cells share their stretch with the one before. */
  #partsOf(from: number, to: number): readonly Part[] {
    if (from === this.#partsFrom && to === this.#partsTo) return this.#parts;
    const parts: Part[] = [];
    for (let step = this.#firstStepAfter(from); step < this.#steps.length; step++) {
      const { startEpochMs, endEpochMs } = this.#steps[step];
      if (startEpochMs >= to) break;
      const begin = Math.max(from, startEpochMs);
      const end = Math.min(to, endEpochMs);
      if (end > begin) parts.push({ step, ...trapezoidHours(from, to, begin, end) });
    }
    this.#partsFrom = from;
    this.#partsTo = to;
    this.#parts = parts;
    return parts;
  }

  /** First step that is not taken and ends after an instant. */
  #firstStepAfter(epochMs: number): number {
    let step = this.#taken;
    while (step < this.#steps.length && this.#steps[step].endEpochMs <= epochMs) step++;
    return step;
  }

  #stepAt(step: number): RadarStep {
    let held = this.#open.get(step);
    if (held === undefined) {
      held = {
        depthMm: new Float64Array(this.#cellCount),
        observedMs: new Float32Array(this.#cellCount),
        bridgedMs: undefined,
        edgeMs: undefined,
        cappedMm: undefined,
        heightMMs: new Float32Array(this.#cellCount),
        weightMs: new Float32Array(this.#cellCount),
        variantMm: Array.from(
          { length: this.#variantCount },
          () => new Float64Array(this.#headlineCells.length),
        ),
        companions: this.#companionKinds.map(() => undefined),
      };
      this.#open.set(step, held);
    }
    return held;
  }
}
