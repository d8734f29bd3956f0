import { type Interval, MS_PER_HOUR } from "@rainreckon/core";
import { type CompanionKind, headlinePositions, type RateLayer } from "@rainreckon/mosaic";
import { instantAt, type Join, Joiner } from "./joins.ts";
import { addDepth, addMs, addPlane, addTime } from "./part-sums.ts";
import { type FieldShape, type RadarStep, StepPool } from "./radar-step.ts";
import { BRIDGED_ABOVE_ROUNDS, type Part, partsOf, type Stretch } from "./stretch.ts";

/** How one radar's scans may speak for the time around them. */
export interface TimeRules {
  readonly medianRoundMs: number;
  /** Longest stretch between two scans that is bridged; equality bridges. */
  readonly maxGapMs: number;
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

/** A stretch at one cell with the layers at its ends; one and the same at an edge. */
export interface LayerStretch extends Omit<Stretch, "rate0" | "rate1"> {
  readonly layer0: RateLayer;
  readonly layer1: RateLayer;
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
  readonly #variantCount: number;
  readonly #kinds: readonly CompanionKind[];
  readonly #cellCount: number;
  readonly #headlineAt: Int32Array | undefined;
  readonly #zeros: Float32Array;
  readonly #pool: StepPool;
  readonly #open = new Map<number, RadarStep>();
  readonly #joiner: Joiner;
  readonly #layers: (HeldLayer | undefined)[] = [];
  #lent: RadarStep[] = [];
  /** The stretches asked for last, their step, and by layer the sweep that spoke for their cell, -1 for none. */
  #stretches: readonly LayerStretch[] = [];
  #stretchesOfStep = -1;
  readonly #spoken: number[] = [];
  #taken = 0;
  #released = 0;

  /** @param steps - contiguous, in time order */
  constructor(steps: readonly Interval[], rules: TimeRules, shape: FieldShape) {
    this.#steps = steps;
    this.#rules = rules;
    this.#cellCount = shape.cellCount;
    this.#variantCount = shape.variantCount;
    this.#kinds = (shape.companions ?? []).map(({ kind }) => kind);
    this.#headlineAt = headlinePositions(shape.headlineCells, shape.cellCount);
    this.#zeros = new Float32Array(shape.cellCount);
    this.#pool = new StepPool(shape);
    this.#joiner = new Joiner(shape.cellCount);
  }

  /** @param layer - kept, and read until `release` lets it go: it must not change */
  add(layer: RateLayer, place: LayerPlace): void {
    if (place.startsAnew === true) this.#joiner.startAnew();
    const held: HeldLayer = { ...layer, ...place };
    this.#layers.push(held);
    const halfMs = this.#rules.medianRoundMs / 2;
    if (place.isFirst) this.#addEdge(held, -halfMs, 0);
    if (place.isLast) this.#addEdge(held, 0, halfMs);
    for (const join of this.#joiner.add(this.#layers, this.#rules.maxGapMs)) {
      const previous = this.#layers[join.before] as HeldLayer;
      for (const part of this.#partsOf(join.fromEpochMs, join.toEpochMs)) {
        this.#addPart(join, part, previous, held);
      }
    }
    this.#addTolls(held);
  }

  /** True once no later layer, whose earliest sample is at `nextEpochMs`, can change a step. */
  isSettled(step: number, nextEpochMs: number): boolean {
    const reachMs = Math.max(this.#rules.maxGapMs, this.#rules.medianRoundMs / 2);
    return nextEpochMs >= this.#steps[step].endEpochMs + reachMs;
  }

  /** Hands over a settled step, which stands until `release` is called. Steps are taken in order, each once. */
  take(step: number): RadarStep {
    const taken = this.#stepAt(step);
    this.#open.delete(step);
    this.#taken = step + 1;
    this.#lent.push(taken);
    return taken;
  }

  /** Forgets layers that can no longer matter to a step that was not taken yet, and takes back the steps handed over. */
  release(): void {
    for (const step of this.#lent) this.#pool.giveBack(step);
    this.#lent = [];
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
   *
   * @param rateOf - the rate to read: the layer's own or a variant's
   */
  stretches(step: number, cell: number, rateOf: (layer: RateLayer) => number): Stretch[] {
    return this.layerStretches(step, cell).map(({ layer0, layer1, ...stretch }) => ({
      ...stretch,
      rate0: rateOf(layer0),
      rate1: rateOf(layer1),
    }));
  }

  /**
   * The same with the layers at both ends. Needed only where two radars observed different parts of a step.
   *
   * @returns the same array as the last time where the same sweeps spoke for the cell as for the last one
   */
  layerStretches(step: number, cell: number): readonly LayerStretch[] {
    if (this.#isSeenAlike(cell) && this.#stretchesOfStep === step) return this.#stretches;
    this.#stretches = this.#stretchesAt(step, cell);
    this.#stretchesOfStep = step;
    return this.#stretches;
  }

  /** Whether the same sweep of each layer speaks for a cell as did for the one asked about last. */
  #isSeenAlike(cell: number): boolean {
    let alike = this.#spoken.length === this.#layers.length;
    for (let n = this.#released; n < this.#layers.length; n++) {
      const layer = this.#layers[n];
      const speaks = layer !== undefined && layer.rateMmPerHour[cell] >= 0;
      const sweep = speaks ? (layer.slot?.[cell] ?? 0) : -1;
      if (this.#spoken[n] === sweep) continue;
      this.#spoken[n] = sweep;
      alike = false;
    }
    return alike;
  }

  #stretchesAt(step: number, cell: number): LayerStretch[] {
    const { startEpochMs, endEpochMs } = this.#steps[step];
    const { medianRoundMs, maxGapMs } = this.#rules;
    const half = medianRoundMs / 2;
    const found: LayerStretch[] = [];
    const push = (from: number, to: number, layer0: RateLayer, layer1: RateLayer, kind: Stretch["kind"]) => {
      if (to <= startEpochMs || from >= endEpochMs) return;
      found.push({ fromEpochMs: from, toEpochMs: to, layer0, layer1, kind });
    };
    let from = Number.NaN;
    let before: RateLayer | undefined;
    for (let n = this.#released; n < this.#layers.length; n++) {
      const layer = this.#layers[n];
      if (layer === undefined) continue;
      if (layer.startsAnew === true) before = undefined;
      if (!(layer.rateMmPerHour[cell] >= 0)) continue;
      const at = instantAt(layer, cell);
      if (layer.isFirst) push(at - half, at, layer, layer, "edge");
      const bridged = at - from > BRIDGED_ABOVE_ROUNDS * medianRoundMs;
      if (before !== undefined && at - from <= maxGapMs)
        push(from, at, before, layer, bridged ? "bridged" : "usual");
      if (layer.isLast) push(at, at + half, layer, layer, "edge");
      from = at;
      before = layer;
    }
    return found;
  }

  /** What one stretch adds to one step, at all cells that have it. */
  #addPart({ cells, fromEpochMs, toEpochMs }: Join, part: Part, layer0: RateLayer, layer1: RateLayer): void {
    const into = this.#stepAt(part.step);
    addDepth(into.depthMm, cells, part, layer0.rateMmPerHour, layer1.rateMmPerHour);
    for (let v = 0; v < this.#variantCount; v++) {
      addDepth(into.variantMm[v], cells, part, layer0.variants[v], layer1.variants[v], this.#headlineAt);
    }
    addTime(into, cells, part.ms, layer0, layer1);
    if (toEpochMs - fromEpochMs > BRIDGED_ABOVE_ROUNDS * this.#rules.medianRoundMs) {
      into.bridgedMs ??= this.#pool.zeros();
      addMs(into.bridgedMs, cells, part.ms);
    }
    const [capped0, capped1] = [layer0.cappedRateMmPerHour, layer1.cappedRateMmPerHour];
    if (capped0 !== undefined || capped1 !== undefined) {
      into.cappedMm ??= this.#pool.zeros();
      addPlane(into.cappedMm, cells, part, capped0 ?? this.#zeros, capped1 ?? this.#zeros);
    }
    for (let c = 0; c < this.#kinds.length; c++) {
      const [values0, values1] = [layer0.companions?.[c], layer1.companions?.[c]];
      if (this.#kinds[c] === "toll" || (values0 === undefined && values1 === undefined)) continue;
      addPlane(this.#companion(into, c), cells, part, values0 ?? this.#zeros, values1 ?? this.#zeros);
    }
  }

  /** Half a round before the very first scan, or after the very last: its rates stand still there. */
  #addEdge(layer: HeldLayer, fromMs: number, toMs: number): void {
    const { rateMmPerHour, beamHeightAslM, weight, cappedRateMmPerHour } = layer;
    const partsOfSlot = layer.sweepMidEpochMs.map((mid) => this.#partsOf(mid + fromMs, mid + toMs));
    for (let cell = 0; cell < this.#cellCount; cell++) {
      const rate = rateMmPerHour[cell];
      if (!(rate >= 0)) continue;
      const capped = cappedRateMmPerHour?.[cell] ?? 0;
      const h = this.#headlineAt === undefined ? cell : this.#headlineAt[cell];
      for (const { step, hours0, hours1, ms } of partsOfSlot[layer.slot?.[cell] ?? 0]) {
        const into = this.#stepAt(step);
        into.depthMm[cell] += (hours0 + hours1) * rate;
        into.observedMs[cell] += ms;
        into.heightMMs[cell] += ms * beamHeightAslM[cell];
        into.weightMs[cell] += ms * weight[cell];
        into.edgeMs ??= this.#pool.zeros();
        into.edgeMs[cell] += ms;
        if (capped > 0) {
          into.cappedMm ??= this.#pool.zeros();
          into.cappedMm[cell] += (hours0 + hours1) * capped;
        }
        for (let c = 0; c < this.#kinds.length; c++) {
          const value = this.#kinds[c] === "toll" ? 0 : (layer.companions?.[c]?.[cell] ?? 0);
          if (value !== 0) this.#companion(into, c)[cell] += (hours0 + hours1) * value;
        }
        if (h < 0) continue;
        for (let v = 0; v < this.#variantCount; v++) {
          const own = layer.variants[v][h];
          into.variantMm[v][h] += hours0 * own + hours1 * own;
        }
      }
    }
  }

  /** Rain that is not there: its rate stands for half a median round before and after the round's first sweep. */
  #addTolls({ sweepMidEpochMs, companions }: RateLayer): void {
    if (companions === undefined) return;
    const halfMs = this.#rules.medianRoundMs / 2;
    for (let c = 0; c < this.#kinds.length; c++) {
      const rate = companions[c];
      if (this.#kinds[c] !== "toll" || rate === undefined) continue;
      for (const { step, ms } of this.#partsOf(sweepMidEpochMs[0] - halfMs, sweepMidEpochMs[0] + halfMs)) {
        const sum = this.#companion(this.#stepAt(step), c);
        const hours = ms / MS_PER_HOUR;
        for (let cell = 0; cell < rate.length; cell++) if (rate[cell] !== 0) sum[cell] += hours * rate[cell];
      }
    }
  }

  #companion({ companions }: RadarStep, index: number): Float32Array {
    const plane = companions[index] ?? this.#pool.zeros();
    companions[index] = plane;
    return plane;
  }

  #partsOf(from: number, to: number): Part[] {
    return partsOf(this.#steps, this.#firstStepAfter(from), from, to);
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
      held = this.#pool.empty();
      this.#open.set(step, held);
    }
    return held;
  }
}
