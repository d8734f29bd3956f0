import { cutWindow, durationMs, rainDays } from "@rainreckon/accumulation";
import {
  type CrossValidation,
  crossValidate,
  type MeanFieldBias,
  meanFieldBias,
} from "@rainreckon/adjustment";
import { gaugeKey, type Interval, type Pair } from "@rainreckon/core";
import { geodesicInverse } from "@rainreckon/mosaic";
import {
  closestOf3x3,
  type GaugeEvidence,
  type GaugeVerdict,
  judgeGauges,
  leaveOut,
  leftOutReasons,
  makePairs,
  type ScoreOptions,
  type ScoreTable,
  scorePairs,
} from "@rainreckon/verification";
import type { AssembledRun } from "./assemble.ts";
import type { GaugeInput } from "./gauges.ts";
import { sourceIds } from "./job.ts";
import type { PreparedRun } from "./prepare.ts";

/** A gauge beside the radar, over the whole window and by interval. */
export interface ComparedGauge {
  readonly gauge: GaugeInput;
  readonly verdict: GaugeVerdict;
  readonly whole: Pair;
  readonly rainDays: readonly Pair[];
  /** Window depth of the cell among the 3 × 3 that comes closest: a diagnostic of displacement, never a score. */
  readonly closestOf3x3Mm: number;
}

/** What comparing with the gauges came to. */
export interface Comparison {
  readonly gauges: readonly ComparedGauge[];
  /** By interval, all gauges; those of gauges that are not trusted are not used. */
  readonly pairs: readonly Pair[];
  readonly bias: MeanFieldBias;
  /** Undefined where there is no adjustment. */
  readonly crossValidation: CrossValidation<Pair> | undefined;
  readonly scoreOptions: ScoreOptions;
  readonly before: ScoreTable;
  readonly after: ScoreTable | { readonly reason: string };
  /** Gauge depth that was shared out by time, because a reading crossed a border. */
  readonly splitMm: number;
}

/** Pairs every gauge with its cells, doubts what must be doubted, adjusts and scores. */
export function compareWithGauges(run: PreparedRun, total: AssembledRun): Comparison {
  const { plan } = run.loaded;
  const anchor = run.window.startEpochMs % run.stepMs;
  const pairMs = durationMs(plan.pairs.interval);
  const intervals = cutWindow(run.window, pairMs, anchor);
  const days = wholeRainDays(run);
  let splitMm = 0;
  const compared = run.gauges.gauges.map((gauge, g) => {
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
    splitMm += made.splitMm;
    return {
      gauge,
      whole: made.whole,
      byInterval: made.byInterval,
      rainDays: days.length === 0 ? [] : makePairs({ ...input, intervals: days }).byInterval,
    };
  });
  const evidence = compared.map(({ gauge, whole, byInterval }): GaugeEvidence => {
    const override = plan.overrides.find(
      (one) => one.network === gauge.series.network && one.gauge === gauge.series.id,
    );
    return { series: gauge.series, whole, byInterval, ...(override === undefined ? {} : { override }) };
  });
  const verdicts = judgeGauges(evidence);
  const reasons = leftOutReasons(verdicts);
  const pairs = leaveOut(
    compared.flatMap(({ byInterval }) => byInterval),
    reasons,
  );
  const { method, minGauges, minGaugeSumMm, factorLimits } = plan.adjustment;
  const bias: MeanFieldBias =
    method === "none"
      ? {
          ...meanFieldBias([], { minGauges, minGaugeSumMm, factorLimits }),
          applied: false,
          reason: "switched off in the plan",
        }
      : meanFieldBias(pairs, { minGauges, minGaugeSumMm, factorLimits });
  const crossValidation = bias.applied ? crossValidate(pairs, { factorLimits }) : undefined;
  const scoreOptions: ScoreOptions = {
    thresholdMm: plan.pairs.thresholdMm,
    thresholdsMm: plan.pairs.thresholdsMm,
    rangeBandsKm: plan.pairs.rangeBandsKm,
    pairIntervalMs: pairMs,
    resolutionMm: new Map(
      run.gauges.gauges
        .filter(({ series }) => series.resolutionMm !== undefined)
        .map(({ series }) => [gaugeKey(series), series.resolutionMm as number]),
    ),
    bootstrap: plan.bootstrap,
  };
  return {
    gauges: compared.map(({ gauge, whole, rainDays: ofDays }, g) => ({
      gauge,
      verdict: verdicts[g],
      whole: leaveOut([whole], reasons)[0],
      rainDays: leaveOut(ofDays, reasons),
      closestOf3x3Mm:
        closestOf3x3(total.planes.totalMm, run.grid, gauge.cell, whole.gaugeMm)?.valueMm ?? Number.NaN,
    })),
    pairs,
    bias,
    crossValidation,
    scoreOptions,
    before: scorePairs(pairs, scoreOptions),
    after:
      crossValidation === undefined
        ? { reason: bias.applied ? "no cross-validation" : `no adjustment: ${bias.reason}` }
        : scorePairs(crossValidation.pairs, scoreOptions),
    splitMm,
  };
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
  let loudest = -1;
  for (let r = 0; r < run.shape.radars.length; r++) {
    const share = total.planes.radarShare[r][cell];
    if (share > (total.planes.radarShare[loudest]?.[cell] ?? 0)) loudest = r;
  }
  const site = run.shape.radars[loudest]?.site;
  return {
    radarId: sourceIds(run.shape)[loudest] ?? "",
    rangeKm: site === undefined ? Number.NaN : geodesicInverse(site, station).distanceM / 1000,
    beamHeightAslM: total.planes.beamHeightAslM[cell],
  };
}
