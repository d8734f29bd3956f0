import type { CompanionValue } from "@rainreckon/mosaic";

/** What the fields of a run are made of. */
export interface FieldShape {
  readonly cellCount: number;
  /** Flat indices of the cells at which depths under other relations are kept, each once. */
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

/** Makes empty steps, out of the arrays of those that nobody needs any more. */
export class StepPool {
  readonly #shape: FieldShape;
  readonly #float32: Float32Array[] = [];
  readonly #spare: RadarStep[] = [];

  constructor(shape: FieldShape) {
    this.#shape = shape;
  }

  /** An array of zeros, shape [cells]. */
  zeros(): Float32Array {
    return this.#float32.pop()?.fill(0) ?? new Float32Array(this.#shape.cellCount);
  }

  empty(): RadarStep {
    const spare = this.#spare.pop();
    if (spare !== undefined) {
      for (const array of [spare.depthMm, spare.observedMs, spare.heightMMs, spare.weightMs]) array.fill(0);
      for (const variant of spare.variantMm) variant.fill(0);
      return spare;
    }
    const { cellCount, headlineCells, variantCount, companions } = this.#shape;
    return {
      depthMm: new Float64Array(cellCount),
      observedMs: new Float32Array(cellCount),
      bridgedMs: undefined,
      edgeMs: undefined,
      cappedMm: undefined,
      heightMMs: new Float32Array(cellCount),
      weightMs: new Float32Array(cellCount),
      variantMm: Array.from({ length: variantCount }, () => new Float64Array(headlineCells.length)),
      companions: Array.from(companions ?? [], () => undefined),
    };
  }

  /** Takes back a step that nobody reads any more. */
  giveBack(step: RadarStep): void {
    for (const array of [step.bridgedMs, step.edgeMs, step.cappedMm, ...step.companions]) {
      if (array !== undefined) this.#float32.push(array);
    }
    step.bridgedMs = undefined;
    step.edgeMs = undefined;
    step.cappedMm = undefined;
    step.companions.fill(undefined);
    this.#spare.push(step);
  }
}
