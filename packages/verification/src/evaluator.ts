/**
 * A set of scores as functions of how often each unit of a sample occurs.
 *
 * A unit is what is resampled together: all pairs of one interval of time, or of one gauge. With every
 * weight 1 the scores are the scores of the sample itself, so the figure and its interval of confidence
 * come from the same formula.
 */
export interface Evaluator<Name extends string> {
  readonly names: readonly Name[];
  /**
   * @param unitWeights - shape [unitCount], whole numbers
   * @param out - shape [names.length]: the scores, NaN where undefined
   */
  evaluate(unitWeights: Float64Array, out: Float64Array): void;
}

/** Which unit each pair belongs to: shape [n], values 0 to unitCount - 1. */
export interface Units {
  readonly unitOf: Uint32Array;
  readonly unitCount: number;
}

/** All pairs in one unit: for scores without intervals of confidence. */
export function oneUnit(pairCount: number): Units {
  return { unitOf: new Uint32Array(pairCount), unitCount: 1 };
}

/** A score's value, or NaN and why. */
export interface ScoreValue {
  readonly value: number;
  readonly reason?: string;
}

/** The scores of the sample itself. */
export function valuesOf<Name extends string>(
  evaluator: Evaluator<Name>,
  unitCount: number,
): Record<Name, number> {
  const out = new Float64Array(evaluator.names.length);
  evaluator.evaluate(new Float64Array(unitCount).fill(1), out);
  return Object.fromEntries(evaluator.names.map((name, k) => [name, out[k]])) as Record<Name, number>;
}
