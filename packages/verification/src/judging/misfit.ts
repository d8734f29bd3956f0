/** Relative error of a radar's depth over ten minutes at a point, one standard deviation, where nothing is wrong. House rule; only its shape matters, since misfits are read beside those of other gauges. */
const RELATIVE_ERROR = 0.3;

/** How badly a gauge fits what it should have read. */
export interface Misfit {
  /** Mean over wet steps of squared differences between square roots of depths, over what chance would give; NaN without any. */
  readonly perStep: number;
  /** Steps that both sides observed; and those of them with rain on either side. */
  readonly steps: number;
  readonly wetSteps: number;
  readonly gaugeMm: number;
  readonly expectedMm: number;
}

/**
 * How badly a gauge's depths fit the expected ones, step by step.
 *
 * Differences are taken between square roots, whose scatter depends least on how hard it rains, and held against
 * a tip that falls into one step or the next (variance of a difference of two uniform shares of a tip, tip²/6) and a
 * relative error of the radar.
 *
 * @param gaugeMm - shape [n], NaN where not observed
 * @param expectedMm - shape [n], before `factor`
 * @param factor - what the expected depths are multiplied by
 * @param tipMm - smallest depth the gauge can tell
 */
export function misfit(
  gaugeMm: ArrayLike<number>,
  expectedMm: ArrayLike<number>,
  factor: number,
  tipMm: number,
): Misfit {
  let sum = 0;
  let steps = 0;
  let wetSteps = 0;
  let gauge = 0;
  let expected = 0;
  for (let k = 0; k < gaugeMm.length; k++) {
    const g = gaugeMm[k];
    const x = factor * expectedMm[k];
    if (Number.isNaN(g) || Number.isNaN(x)) continue;
    steps++;
    gauge += g;
    expected += x;
    if (Math.max(g, x) < tipMm / 2) continue;
    wetSteps++;
    const difference = Math.sqrt(Math.max(0, g)) - Math.sqrt(x);
    const variance = (tipMm ** 2 / 6 + (RELATIVE_ERROR * x) ** 2) / (4 * Math.max(x, tipMm / 2));
    sum += difference ** 2 / variance;
  }
  return { perStep: sum / wetSteps, steps, wetSteps, gaugeMm: gauge, expectedMm: expected };
}
