import { durationMs } from "@rainreckon/accumulation";
import {
  crossValidatedPairs,
  depthAtPoint,
  type HeldOutGauge,
  type PairedPlace,
  spanDepthAt,
  type TrustRule,
  type WindowGauge,
  windowGauges,
} from "@rainreckon/adjustment";
import { gaugeKey, type Pair } from "@rainreckon/core";
import {
  closestOf3x3,
  type GaugeEvidence,
  type GaugeVerdict,
  type JudgeContext,
  judgeGauges,
  judgeRadars,
  leaveOut,
  leftOutReasons,
  type RadarVerdict,
  type ScoreOptions,
  type ScoreTable,
  scorePairs,
} from "@rainreckon/verification";
import { type AdjustmentResult, adjust } from "./adjust.ts";
import type { AssembledRun } from "./assemble.ts";
import { gaugeEvidence, judgeContext, radarContext } from "./gauge-evidence.ts";
import type { GaugeInput } from "./gauges.ts";
import { pairGauges } from "./pair-gauges.ts";
import type { PreparedRun } from "./prepare.ts";

/** A gauge beside the radar, over the whole window and by interval. */
export interface ComparedGauge {
  readonly gauge: GaugeInput;
  readonly verdict: GaugeVerdict;
  readonly whole: Pair;
  readonly rainDays: readonly Pair[];
  /** The gauge as the adjustment sees it, trusted or not. */
  readonly place: PairedPlace;
  /** What the other gauges make of it; undefined where there is no adjustment or it had no part in one. */
  readonly heldOut: HeldOutGauge | undefined;
}

/** What comparing with the gauges came to. */
export interface Comparison extends AdjustmentResult {
  readonly gauges: readonly ComparedGauge[];
  /** One per radar of the run. */
  readonly radars: readonly RadarVerdict[];
  /** By interval, all gauges; those of gauges that are not trusted are not used. */
  readonly pairs: readonly Pair[];
  readonly scoreOptions: ScoreOptions;
  readonly before: ScoreTable;
  readonly after: ScoreTable | { readonly reason: string };
  /** Gauge depth that was shared out by time, because a reading crossed a border. */
  readonly splitMm: number;
}

/** Pairs every gauge with its cells, doubts what must be doubted, adjusts and scores. */
export function compareWithGauges(run: PreparedRun, total: AssembledRun): Comparison {
  const { plan } = run.loaded;
  const pairMs = durationMs(plan.pairs.interval);
  const compared = pairGauges(run, total);
  const evidence = gaugeEvidence(run, total, compared);
  const context = judgeContext(run, total);
  const verdicts = judgeGauges(evidence, context);
  const reasons = leftOutReasons(verdicts);
  const byInterval = compared.flatMap((one) => one.byInterval);
  const pairs = leaveOut(byInterval, reasons);
  const where = new Map(
    compared.map(({ gauge: { series, xM, yM } }, g) => {
      const radarTotalMm = observedSum(total.gauges.depthMm[g]);
      const radarPointTotalMm = depthAtPoint(run.grid, total.planes.totalMm, xM, yM, radarTotalMm);
      return [gaugeKey(series), { xM, yM, radarTotalMm, radarPointTotalMm }];
    }),
  );
  const all = windowGauges(byInterval, where);
  const result = adjust(run, total, pairs, all, trustWhenJudged(evidence, context, all));
  const { adjustment } = result;
  const places = byKey(all);
  const heldOut = new Map(
    (adjustment.applied ? adjustment.crossValidation.gauges : []).map((held) => [
      gaugeKey({ network: held.gauge.network, id: held.gauge.gaugeId }),
      held,
    ]),
  );
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
      place: places.get(gaugeKey(gauge.series)) ?? {
        xKm: gauge.xM / 1000,
        yKm: gauge.yM / 1000,
        rangeKm: whole.rangeKm,
        radarMm: whole.radarMm,
        radarTotalMm: observedSum(total.gauges.depthMm[g]),
        radarPointTotalMm: observedSum(total.gauges.depthMm[g]),
        coverage: 0,
        readings: [],
      },
      heldOut: heldOut.get(gaugeKey(gauge.series)),
      verdict: withClosestCell(verdicts[g], whole, run, total, gauge),
      whole: leaveOut([whole], reasons)[0],
      rainDays: leaveOut(ofDays, reasons),
    })),
    radars: judgeRadars(evidence, verdicts, radarContext(run)),
    ...result,
    pairs,
    scoreOptions,
    before: scorePairs(pairs, scoreOptions),
    after: adjustment.applied
      ? scorePairs(crossValidatedPairs(pairs, adjustment.crossValidation), scoreOptions)
      : { reason: `no adjustment: ${adjustment.reason}` },
    splitMm: compared.reduce((sum, { splitMm }) => sum + splitMm, 0),
  };
}

/** Which gauges are trusted where only some of them are known: judged anew, without the evidence of the others. */
function trustWhenJudged(
  evidence: readonly GaugeEvidence[],
  context: JudgeContext,
  all: readonly WindowGauge[],
): TrustRule {
  const keyOf = ({ network, gaugeId }: WindowGauge) => gaugeKey({ network, id: gaugeId });
  return (some) => {
    const known = new Set(some);
    const absent = new Set(all.filter((gauge) => !known.has(gauge)).map(keyOf));
    const judged = evidence.filter(({ series }) => !absent.has(gaugeKey(series)));
    const reasons = leftOutReasons(judgeGauges(judged, context));
    return some.filter((gauge) => !reasons.has(keyOf(gauge)));
  };
}

/**
 * Adds to the evidence which of the 3 × 3 cells comes closest to the gauge: a sign of rain that drifted or of a
 * position that is off. It picks by the answer, so it never enters a score. Said only over a window that both
 * sides saw whole, since the cells are known for the whole window only.
 */
function withClosestCell(
  verdict: GaugeVerdict,
  whole: Pair,
  run: PreparedRun,
  total: AssembledRun,
  { cell }: GaugeInput,
): GaugeVerdict {
  if (!(whole.commonFraction > 0.99)) return verdict;
  const closest = closestOf3x3(total.planes.totalMm, run.grid, cell, whole.gaugeMm);
  if (closest === undefined || closest.index === cell) return verdict;
  const words = `Of the 3 × 3 cells around it, the closest has ${closest.valueMm.toFixed(1)} mm (a sign of displacement, no score).`;
  return { ...verdict, evidence: `${verdict.evidence} ${words}` };
}

/** Adjusted depth of a pair at its gauge, mm; NaN where there is no adjustment. */
export function adjustedPairMm({ adjustment }: Comparison, { place }: ComparedGauge, pair: Pair): number {
  if (!adjustment.applied) return Number.NaN;
  return spanDepthAt(adjustment.learned, place, pair, pair.radarMm, adjustment.share);
}

/** The same by what learned without the gauge. A gauge that shaped nothing is met by the adjustment itself. */
export function crossValidatedPairMm(comparison: Comparison, gauge: ComparedGauge, pair: Pair): number {
  const { heldOut, place } = gauge;
  if (heldOut === undefined) return adjustedPairMm(comparison, gauge, pair);
  return spanDepthAt(heldOut.learned, place, pair, pair.radarMm, heldOut.share);
}

/** Sum of the steps that were observed; 0 where none was. */
function observedSum(depthMm: Float64Array): number {
  return depthMm.reduce((sum, mm) => (Number.isNaN(mm) ? sum : sum + mm), 0);
}

function byKey<G extends { readonly network: string; readonly gaugeId: string }>(
  gauges: readonly G[],
): Map<string, G> {
  return new Map(gauges.map((gauge) => [gaugeKey({ network: gauge.network, id: gauge.gaugeId }), gauge]));
}
