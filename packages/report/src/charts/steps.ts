import type { Hyetograph, StepSeries } from "../input.ts";

/** More bars than this cannot be told apart in a small chart. */
export const MOST_STEPS = 96;

/**
 * A hyetograph in longer steps, so that no more than `most` remain.
 *
 * Depth is the sum over what was observed, NaN only where nothing was; the observed share is the mean over
 * the joined steps, those past the end of the series counted out.
 */
export function coarsen(graph: Hyetograph, most = MOST_STEPS): Hyetograph {
  const count = stepCount(graph);
  const join = Math.ceil(count / most);
  if (join <= 1) return graph;
  return {
    ...graph,
    stepMs: graph.stepMs * join,
    sides: graph.sides.map((side) => joinSteps(side, count, join)),
  };
}

/** Number of steps of a hyetograph: that of its longest side. */
export function stepCount(graph: Hyetograph): number {
  return Math.max(0, ...graph.sides.map((side) => side.depthMm.length));
}

function joinSteps(side: StepSeries, count: number, join: number): StepSeries {
  const out = Math.ceil(count / join);
  const depthMm = new Float64Array(out).fill(Number.NaN);
  const observedFraction = new Float64Array(out);
  for (let i = 0; i < side.depthMm.length; i += 1) {
    const step = Math.floor(i / join);
    const members = Math.min(join, count - step * join);
    observedFraction[step] += side.observedFraction[i] / members;
    const depth = side.depthMm[i];
    if (Number.isFinite(depth)) depthMm[step] = (Number.isNaN(depthMm[step]) ? 0 : depthMm[step]) + depth;
  }
  return { ...side, depthMm, observedFraction };
}

/** Sum of the observed steps of a side; NaN where none was observed. */
export function observedSumMm(side: StepSeries): number {
  let sum = Number.NaN;
  for (let i = 0; i < side.depthMm.length; i += 1) {
    const depth = side.depthMm[i];
    if (Number.isFinite(depth)) sum = (Number.isNaN(sum) ? 0 : sum) + depth;
  }
  return sum;
}

/** Deepest step of all sides of all graphs; 0 where nothing was observed. */
export function deepestStepMm(graphs: readonly Hyetograph[]): number {
  let deepest = 0;
  for (const graph of graphs) {
    for (const side of graph.sides) {
      for (let i = 0; i < side.depthMm.length; i += 1) {
        if (side.depthMm[i] > deepest) deepest = side.depthMm[i];
      }
    }
  }
  return deepest;
}
