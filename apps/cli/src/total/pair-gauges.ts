import { cutWindow, durationMs, rainDays } from "@rainreckon/accumulation";
import type { Interval, Pair } from "@rainreckon/core";
import { geodesicInverse } from "@rainreckon/mosaic";
import { type GaugePairs, makePairs } from "@rainreckon/verification";
import { loudestRadar } from "./adjust.ts";
import type { AssembledRun } from "./assemble.ts";
import type { GaugeInput } from "./gauges.ts";
import { sourceIds } from "./job.ts";
import type { PreparedRun } from "./prepare.ts";

/** A gauge beside its cells of the radar, before anybody judged it. */
export interface PairedGauge extends GaugePairs {
  readonly gauge: GaugeInput;
  readonly rainDays: readonly Pair[];
}

/** Pairs every gauge of a run with its cells, over the window, by interval and by rain day. */
export function pairGauges(run: PreparedRun, total: AssembledRun): PairedGauge[] {
  const { plan } = run.loaded;
  const anchor = run.window.startEpochMs % run.stepMs;
  const pairMs = durationMs(plan.pairs.interval);
  const intervals = cutWindow(run.window, pairMs, anchor);
  const days = wholeRainDays(run);
  return run.gauges.gauges.map((gauge, g) => {
    const input = {
      series: gauge.series,
      radar: {
        startEpochMs: run.window.startEpochMs,
        stepMs: run.stepMs,
        depthMm: total.gauges.depthMm[g],
        observedFraction: total.gauges.observedFraction[g],
      },
      minCommonFraction: plan.pairs.minCommonFraction,
      ...radarAt(run, total, gauge),
    };
    const made = makePairs({ ...input, intervals });
    return {
      gauge,
      whole: made.whole,
      byInterval: made.byInterval,
      splitMm: made.splitMm,
      rainDays: days.length === 0 ? [] : makePairs({ ...input, intervals: days }).byInterval,
    };
  });
}

/** Rain days that lie wholly in the window: over part of a day there is no daily pair. */
function wholeRainDays(run: PreparedRun): Interval[] {
  const rule = run.loaded.plan.intervals.rainDay;
  if (rule === undefined) return [];
  return rainDays(run.window, rule).filter(
    (day) =>
      day.startEpochMs >= run.window.startEpochMs &&
      day.endEpochMs <= run.window.endEpochMs &&
      (day.startEpochMs - run.window.startEpochMs) % run.stepMs === 0 &&
      (day.endEpochMs - day.startEpochMs) % run.stepMs === 0,
  );
}

/** The radar that speaks loudest at a gauge, how far it is, and how high its beam. */
function radarAt(
  run: PreparedRun,
  total: AssembledRun,
  { cell, station }: GaugeInput,
): { radarId: string; rangeKm: number; beamHeightAslM: number } {
  const loudest = loudestRadar(total, cell);
  const site = run.shape.radars[loudest]?.site;
  return {
    radarId: sourceIds(run.shape)[loudest] ?? "",
    rangeKm: site === undefined ? Number.NaN : geodesicInverse(site, station).distanceM / 1000,
    beamHeightAslM: total.planes.beamHeightAslM[cell],
  };
}
