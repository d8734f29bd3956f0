import { spanDepthAt } from "@rainreckon/adjustment";
import { gaugeKey } from "@rainreckon/core";
import type { Hyetograph, StepSeries } from "@rainreckon/report";
import { gaugeSteps } from "@rainreckon/verification";
import type { ComparedGauge } from "./against-gauges.ts";
import { adjustedSteps, type FigureSources } from "./figures.ts";

/** Rain against time at a gauge: its own, the radar's, and the adjusted radar's as it would be without this gauge. */
export function gaugeHyetograph(
  { gauge, place, heldOut }: ComparedGauge,
  g: number,
  { run, total, comparison }: FigureSources,
): Hyetograph {
  const { series, station } = gauge;
  // A gauge that reports less often than the series step is drawn on its own step.
  const own = series.stepMs ?? run.stepMs;
  const perStep = Math.max(1, Math.ceil(own / run.stepMs));
  const stepMs = perStep * run.stepMs;
  const count = Math.floor(run.steps.length / perStep);
  const measured = gaugeSteps(series, run.window.startEpochMs, stepMs, Math.max(1, count));
  const depthMm = new Float64Array(count).fill(Number.NaN);
  const adjustedMm = new Float64Array(count).fill(Number.NaN);
  const observedFraction = new Float64Array(count);
  const { adjustment } = comparison;
  const by = heldOut ?? (adjustment.applied ? adjustment : undefined);
  const into = (sums: Float64Array, step: number, mm: number) => {
    sums[step] = Number.isNaN(sums[step]) ? mm : sums[step] + mm;
  };
  for (let k = 0; k < count * perStep; k++) {
    const mm = total.gauges.depthMm[g][k];
    if (Number.isNaN(mm)) continue;
    const step = Math.floor(k / perStep);
    into(depthMm, step, mm);
    if (by !== undefined) into(adjustedMm, step, spanDepthAt(by.learned, place, run.steps[k], mm, by.share));
    observedFraction[step] += total.gauges.observedFraction[g][k] / perStep;
  }
  return {
    id: gaugeKey(series),
    label: station.name === undefined ? `${series.network} ${series.id}` : `${series.id} ${station.name}`,
    startEpochMs: run.window.startEpochMs,
    stepMs,
    sides: [
      { role: "gauge", depthMm: measured.depthMm, observedFraction: measured.observedFraction },
      { role: "radar", depthMm, observedFraction },
      ...(by === undefined ? [] : [{ role: "held-out", depthMm: adjustedMm, observedFraction } as const]),
    ],
  };
}

/**
 * Rain against time over an area: adjusted beside radar where there is an adjustment.
 *
 * @param area - place of it among the areas of the run's shape
 * @param windowMm - its adjusted depth of the window; NaN without an adjustment
 */
export function areaHyetograph(
  { id, name }: { readonly id: string; readonly name: string },
  area: number,
  windowMm: number,
  sources: FigureSources,
): Hyetograph {
  const { run, total, comparison } = sources;
  const observedFraction = total.areas.observedFraction[area];
  const radar: StepSeries = { role: "radar", depthMm: total.areas.depthMm[area], observedFraction };
  return {
    id,
    label: name === "" ? id : name,
    startEpochMs: run.window.startEpochMs,
    stepMs: run.stepMs,
    sides: comparison.adjustment.applied
      ? [{ role: "adjusted", depthMm: adjustedSteps(area, windowMm, sources), observedFraction }, radar]
      : [radar],
  };
}
