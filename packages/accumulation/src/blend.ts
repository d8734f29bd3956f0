import type { Interval } from "@rainreckon/core";
import { headlinePositions, type RateLayer } from "@rainreckon/mosaic";
import type { RadarIntegrator } from "./integrate.ts";
import type { FieldShape, RadarStep } from "./radar-step.ts";
import { type Span, SpanCutter } from "./spans.ts";

/** Time that may be missing from a step before it counts as partly observed: rounding of float32 milliseconds. */
export const FULL_SLACK_MS = 2;

/** One step of all radars together. Shapes [cells] unless said otherwise. */
export interface BlendedStep {
  /** Depth over the time that at least one radar observed; NaN where none did. */
  readonly depthMm: Float64Array;
  readonly observedMs: Float64Array;
  readonly bridgedMs: Float64Array;
  readonly edgeMs: Float64Array;
  readonly cappedMm: Float64Array;
  /** Beam height above mean sea level times the milliseconds it held. */
  readonly heightMMs: Float64Array;
  /** Shape [radars][cells]: milliseconds of the step that each radar spoke for, by weight; they sum to observedMs. */
  readonly shareMs: readonly Float64Array[];
  /** Shape [variants][headline cells]. */
  readonly variantMm: readonly Float64Array[];
  /**
   * Shape [companions][cells], undefined where 0 everywhere. By depth: millimetres times the value; by time: hours
   * times the value, both by the shares of the radars. Tolls: millimetres, those of all radars together.
   */
  readonly companions: readonly (Float64Array | undefined)[];
}

/** A radar's step, and the integrator that made it. */
export interface RadarInStep {
  readonly step: RadarStep;
  readonly integrator: RadarIntegrator;
}

/** A cell of which some radars saw more than others. */
interface PartlySeen {
  readonly cell: number;
  readonly spans: readonly Span[];
}

/** Blends one step with room of its own; see {@link StepBlender}. */
export function blendStep(
  step: Interval,
  stepIndex: number,
  radars: readonly RadarInStep[],
  shape: FieldShape,
): BlendedStep {
  return new StepBlender(shape, radars.length).blend(step, stepIndex, radars);
}

/**
 * Blends the depths of each step of several radars: D = Σ w·D_r / Σ w over the radars that observed.
 *
 * Weights are those of the step, constant on spans of unchanged availability: where one radar saw only
 * part of the step, the step is cut where its view begins or ends and each span is blended on its own.
 * Depths of the same span are blended, never rates of different minutes. What travels with the rain is blended by the
 * same shares.
 *
 * It works in the same arrays for every step: what `blend` gives stands until the next call.
 */
export class StepBlender {
  readonly #shape: FieldShape;
  /** Where a cell stands among the headline's; undefined where the headline is made of all cells in their order. */
  readonly #headlineAt: Int32Array | undefined;
  /** Shape [radars][cells]: by how much the depth of a radar counts; 0 where it is cut into spans, or saw nothing. */
  readonly #shares: readonly Float64Array[];
  readonly #out: Omit<BlendedStep, "companions">;
  /** Arrays for companions, by their place in the list; kept when a step does not need them. */
  readonly #companions: (Float64Array | undefined)[];
  readonly #sums: Float64Array;

  constructor(shape: FieldShape, radarCount: number) {
    const zeros = () => new Float64Array(shape.cellCount);
    this.#shape = shape;
    this.#headlineAt = headlinePositions(shape.headlineCells, shape.cellCount);
    this.#shares = Array.from({ length: radarCount }, zeros);
    this.#sums = new Float64Array(radarCount);
    this.#companions = Array.from(shape.companions ?? [], () => undefined);
    this.#out = {
      depthMm: zeros(),
      observedMs: zeros(),
      bridgedMs: zeros(),
      edgeMs: zeros(),
      cappedMm: zeros(),
      heightMMs: zeros(),
      shareMs: Array.from({ length: radarCount }, zeros),
      variantMm: Array.from(
        { length: shape.variantCount },
        () => new Float64Array(shape.headlineCells.length),
      ),
    };
  }

  /** @param stepIndex - of the step among those of the integrators */
  blend(step: Interval, stepIndex: number, radars: readonly RadarInStep[]): BlendedStep {
    const out = this.#out;
    const steps = radars.map((radar) => radar.step);
    const partly = this.#share(step, stepIndex, radars);
    this.#blendPlane(out.depthMm, Number.NaN, steps, (own) => own.depthMm);
    this.#blendPlane(out.cappedMm, 0, steps, (own) => own.cappedMm);
    this.#blendPlane(out.bridgedMs, 0, steps, (own) => own.bridgedMs);
    this.#blendPlane(out.edgeMs, 0, steps, (own) => own.edgeMs);
    for (const { cell, spans } of partly) {
      out.depthMm[cell] = this.#overSpans(spans, (layer) => layer.rateMmPerHour[cell]);
      out.cappedMm[cell] = this.#overSpans(spans, (layer) => layer.cappedRateMmPerHour?.[cell] ?? 0);
      out.bridgedMs[cell] = this.#timeOf(spans, "bridged");
      out.edgeMs[cell] = this.#timeOf(spans, "edge");
    }
    this.#blendVariants(steps, partly);
    return { ...out, companions: this.#blendCompanions(steps, partly) };
  }

  /** Settles who speaks for how much of each cell. @returns the cells that must be cut into spans */
  #share(step: Interval, stepIndex: number, radars: readonly RadarInStep[]): PartlySeen[] {
    const { observedMs, heightMMs, shareMs } = this.#out;
    const shares = this.#shares;
    const lengthMs = step.endEpochMs - step.startEpochMs;
    const seenMs = radars.map((radar) => radar.step.observedMs);
    const weightMs = radars.map((radar) => radar.step.weightMs);
    const heights = radars.map((radar) => radar.step.heightMMs);
    const cutter = new SpanCutter(step, stepIndex, radars);
    const partly: PartlySeen[] = [];
    for (let cell = 0; cell < observedMs.length; cell++) {
      let observing = 0;
      let full = 0;
      let weights = 0;
      for (let r = 0; r < seenMs.length; r++) {
        const ms = seenMs[r][cell];
        shares[r][cell] = 0;
        shareMs[r][cell] = 0;
        if (!(ms > 0)) continue;
        observing++;
        weights += weightMs[r][cell] / ms;
        if (ms >= lengthMs - FULL_SLACK_MS) full++;
      }
      observedMs[cell] = 0;
      heightMMs[cell] = 0;
      if (observing === 0) continue;
      const cut = observing > 1 && full < observing;
      if (cut) {
        const spans = cutter.at(cell);
        for (const { radar, ms } of spans) shareMs[radar][cell] += ms;
        partly.push({ cell, spans });
      }
      for (let r = 0; r < seenMs.length; r++) {
        const ms = seenMs[r][cell];
        if (!(ms > 0)) continue;
        if (!cut) {
          const share = observing === 1 ? 1 : weightMs[r][cell] / ms / weights;
          shares[r][cell] = share;
          shareMs[r][cell] = observing === 1 ? Math.min(lengthMs, ms) : share * lengthMs;
        }
        const spokenMs = shareMs[r][cell];
        observedMs[cell] += spokenMs;
        // Gridded rain has no beam: NaN. Its time is left out where the mean height is made.
        const height = heights[r][cell];
        if (!Number.isNaN(height)) heightMMs[cell] += (spokenMs / ms) * height;
      }
    }
    return partly;
  }

  /**
   * Sums a plane of every radar by their shares.
   *
   * @param blank - what cells become that nobody saw; those that are cut into spans too, until they are filled
   * @param cells - the cell of each value; undefined where the plane has all cells
   */
  #blendPlane(
    out: Float64Array,
    blank: number,
    steps: readonly RadarStep[],
    planeOf: (step: RadarStep) => Float64Array | Float32Array | undefined,
    cells?: Int32Array,
  ): void {
    out.fill(blank);
    for (let r = 0; r < steps.length; r++) {
      const plane = planeOf(steps[r]);
      if (plane !== undefined) addShares(out, plane, this.#shares[r], cells);
    }
  }

  #blendVariants(steps: readonly RadarStep[], partly: readonly PartlySeen[]): void {
    const { variantMm } = this.#out;
    const headlineAt = this.#headlineAt;
    const cells = headlineAt === undefined ? undefined : this.#shape.headlineCells;
    for (let v = 0; v < variantMm.length; v++) {
      this.#blendPlane(variantMm[v], Number.NaN, steps, (own) => own.variantMm[v], cells);
      for (const { cell, spans } of partly) {
        const h = headlineAt === undefined ? cell : headlineAt[cell];
        if (h >= 0) variantMm[v][h] = this.#overSpans(spans, (layer) => layer.variants[v][h]);
      }
    }
  }

  #blendCompanions(steps: readonly RadarStep[], partly: readonly PartlySeen[]): (Float64Array | undefined)[] {
    return Array.from(this.#shape.companions ?? [], ({ kind }, c) => {
      if (steps.every((own) => own.companions[c] === undefined)) return undefined;
      const out = this.#companions[c] ?? new Float64Array(this.#shape.cellCount);
      this.#companions[c] = out;
      if (kind === "toll") {
        out.fill(0);
        for (const { companions } of steps) {
          const toll = companions[c];
          if (toll !== undefined) for (let cell = 0; cell < out.length; cell++) out[cell] += toll[cell];
        }
        return out;
      }
      this.#blendPlane(out, 0, steps, (own) => own.companions[c]);
      for (const { cell, spans } of partly) {
        out[cell] = this.#overSpans(spans, (layer) => layer.companions?.[c]?.[cell] ?? 0);
      }
      return out;
    });
  }

  /** Integrates over the spans of a cell, radar by radar. */
  #overSpans(spans: readonly Span[], rate: (layer: RateLayer) => number): number {
    const sums = this.#sums.fill(0);
    for (const { radar, share, hours0, hours1, layer0, layer1 } of spans) {
      sums[radar] += share * (hours0 * rate(layer0) + hours1 * rate(layer1));
    }
    return total(sums);
  }

  #timeOf(spans: readonly Span[], wanted: Span["kind"]): number {
    const sums = this.#sums.fill(0);
    for (const { radar, kind, ms } of spans) if (kind === wanted) sums[radar] += ms;
    return total(sums);
  }
}

function total(sums: Float64Array): number {
  let sum = 0;
  for (let r = 0; r < sums.length; r++) sum += sums[r];
  return sum;
}

function addShares(
  out: Float64Array,
  plane: Float64Array | Float32Array,
  share: Float64Array,
  cells: Int32Array | undefined,
): void {
  for (let k = 0; k < out.length; k++) {
    const own = share[cells === undefined ? k : cells[k]];
    if (own === 0) continue;
    const before = out[k];
    out[k] = (Number.isNaN(before) ? 0 : before) + own * plane[k];
  }
}
