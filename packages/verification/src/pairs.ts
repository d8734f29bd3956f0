import { type GaugeSeries, gaugeKey, type Interval, type Pair } from "@rainreckon/core";
import { type DoubtedReadings, type GaugeSteps, gaugeSteps } from "./gauge-steps.ts";

/** Slack of comparisons between shares. */
const FRACTION_SLACK = 1e-9;

/**
 * Share of a step that the radar must have observed for the step to count as seen by both. A step is a
 * few minutes; what a twentieth of it hides is far below what one tip can tell. Nothing is scaled up.
 */
const RADAR_STEP_FRACTION = 0.95;

/** Share of the interval that each side must have observed where the gauge's step does not allow common time. */
const WHOLE_INTERVAL_FRACTION = 0.95;

/** Radar depths at one gauge, on the base steps of the run. */
export interface RadarSteps {
  readonly startEpochMs: number;
  readonly stepMs: number;
  /** Shape [count]: depth over the observed part of (start, end] of each step; NaN where not observed. */
  readonly depthMm: Float64Array | Float32Array;
  /** Shape [count]: share of each step that the radar observed, 0 to 1. */
  readonly observedFraction: Float64Array | Float32Array;
}

export interface PairInput {
  readonly series: GaugeSeries;
  readonly radar: RadarSteps;
  /** The intervals to compare over, in time order, their borders on the radar's base steps. */
  readonly intervals: readonly Interval[];
  /** Smallest share of an interval that both must have observed, 0 to 1. */
  readonly minCommonFraction: number;
  /** Radar that carries most of the weight at the gauge, its range and beam height there. */
  readonly radarId: string;
  readonly rangeKm: number;
  readonly beamHeightAslM: number;
  readonly doubted?: DoubtedReadings;
}

/** The pairs of one gauge. */
export interface GaugePairs {
  /** One per interval, in the order given. */
  readonly byInterval: readonly Pair[];
  /** One over the whole span of the intervals, summed over the same common time. */
  readonly whole: Pair;
  /** Gauge depth that was shared out by time because a reading crossed a border of a comparison step. */
  readonly splitMm: number;
}

/**
 * Puts one gauge beside its radar cell, interval by interval and over the whole span.
 *
 * Where the gauge's readings are fine enough, both sides are summed over the steps that both observed:
 * the gauge wholly, the radar at least 95 % of the step. The step is the radar's base step, or for a
 * coarser gauge the smallest multiple of it that holds a reading, if its readings end on those
 * borders. Otherwise the interval counts as one, and each side must have observed at least 95 % of it;
 * the common share is then the least that the two shares allow.
 * A pair is used when the common share reaches `minCommonFraction`; an unused one says why, and holds
 * the depths of what common time there is, NaN without any.
 *
 * @throws RangeError if an interval's borders are not on base steps, or lie outside the radar's steps
 */
export function makePairs(input: PairInput): GaugePairs {
  const { intervals, radar } = input;
  if (intervals.length === 0) throw new RangeError("pairs need at least one interval");
  const spans = intervals.map((interval) => compareOver(interval, input));
  const window: Interval = {
    startEpochMs: intervals[0].startEpochMs,
    endEpochMs: intervals[intervals.length - 1].endEpochMs,
  };
  // A gauge coarser than the intervals can still be compared over the whole span.
  const tooCoarse = spans.some((span) => span.tooCoarse);
  const whole = tooCoarse ? compareOver(window, input) : joined(spans, window);
  return {
    byInterval: spans.map((span) => toPair(span, input, radar.stepMs)),
    whole: toPair(whole, input, radar.stepMs),
    splitMm: spans.reduce((sum, span) => sum + span.splitMm, 0),
  };
}

/**
 * Takes gauges out of scores and factors: the same pairs, with `used` false and the reason of the gauge.
 *
 * @param pairs - pairs of any gauges
 * @param reasons - why a gauge is left out, by `gaugeKey`
 */
export function leaveOut(pairs: readonly Pair[], reasons: ReadonlyMap<string, string>): Pair[] {
  return pairs.map((pair) => {
    const reason = reasons.get(gaugeKey({ network: pair.network, id: pair.gaugeId }));
    return reason === undefined || !pair.used ? pair : { ...pair, used: false, reason };
  });
}

/** What both sides saw of one span, before the rules of use. */
interface Span extends Interval {
  readonly gaugeMm: number;
  readonly radarMm: number;
  readonly commonMs: number;
  readonly gaugeObservedMs: number;
  readonly radarObservedMs: number;
  readonly splitMm: number;
  /** True where a reading is longer than the span. */
  readonly tooCoarse: boolean;
  /** True where the span was compared as one, under the 95 % rule. */
  readonly asOne: boolean;
}

function compareOver(interval: Interval, { series, radar, doubted }: PairInput): Span {
  const lengthMs = interval.endEpochMs - interval.startEpochMs;
  const baseMs = radar.stepMs;
  checkBorders(interval, radar);
  const readingMs = series.stepMs ?? 0;
  const fineGauge = readingMs <= baseMs;
  let stepMs = fineGauge ? baseMs : Math.ceil(readingMs / baseMs) * baseMs;
  if (lengthMs % stepMs !== 0) stepMs = lengthMs;
  const onGauge = (ms: number) =>
    gaugeSteps(series, interval.startEpochMs, ms, Math.round(lengthMs / ms), doubted);
  let gauge = onGauge(stepMs);
  if (!fineGauge && gauge.splitMm > 0 && stepMs !== lengthMs) {
    stepMs = lengthMs;
    gauge = onGauge(stepMs);
  }
  const asOne = !fineGauge && stepMs === lengthMs;
  const radarDepths = onSteps(radar, interval, stepMs);
  const need = asOne ? WHOLE_INTERVAL_FRACTION : 1;
  return {
    ...interval,
    ...overCommonSteps(gauge, radarDepths, need, asOne),
    splitMm: gauge.splitMm,
    tooCoarse: readingMs > lengthMs,
    asOne,
  };
}

function overCommonSteps(gauge: GaugeSteps, radar: RadarSteps, gaugeNeed: number, asOne: boolean) {
  let gaugeMm = 0;
  let radarMm = 0;
  let common = 0;
  let gaugeObserved = 0;
  let radarObserved = 0;
  for (let step = 0; step < gauge.depthMm.length; step++) {
    const ofGauge = Math.min(1, gauge.observedFraction[step]);
    const ofRadar = Math.min(1, radar.observedFraction[step]);
    gaugeObserved += ofGauge;
    radarObserved += ofRadar;
    if (ofGauge < gaugeNeed - FRACTION_SLACK || ofRadar < RADAR_STEP_FRACTION - FRACTION_SLACK) continue;
    gaugeMm += gauge.depthMm[step];
    radarMm += radar.depthMm[step];
    common += asOne ? ofGauge + ofRadar - 1 : Math.min(ofGauge, ofRadar);
  }
  const none = common === 0;
  return {
    gaugeMm: none ? Number.NaN : gaugeMm,
    radarMm: none ? Number.NaN : radarMm,
    commonMs: common * gauge.stepMs,
    gaugeObservedMs: gaugeObserved * gauge.stepMs,
    radarObservedMs: radarObserved * gauge.stepMs,
  };
}

/** Radar depths of an interval, summed from base steps to steps of the gauge. */
function onSteps(radar: RadarSteps, interval: Interval, stepMs: number): RadarSteps {
  const perStep = Math.round(stepMs / radar.stepMs);
  const first = Math.round((interval.startEpochMs - radar.startEpochMs) / radar.stepMs);
  const count = Math.round((interval.endEpochMs - interval.startEpochMs) / stepMs);
  const depthMm = new Float64Array(count);
  const observedFraction = new Float64Array(count);
  for (let step = 0; step < count; step++) {
    for (let k = 0; k < perStep; k++) {
      const base = first + step * perStep + k;
      const fraction = radar.observedFraction[base];
      if (!(fraction > 0)) continue;
      depthMm[step] += radar.depthMm[base];
      observedFraction[step] += fraction / perStep;
    }
  }
  return { startEpochMs: interval.startEpochMs, stepMs, depthMm, observedFraction };
}

function joined(spans: readonly Span[], window: Interval): Span {
  const total = (key: "commonMs" | "gaugeObservedMs" | "radarObservedMs" | "splitMm") =>
    spans.reduce((sum, span) => sum + span[key], 0);
  const common = spans.filter((span) => span.commonMs > 0);
  const depth = (key: "gaugeMm" | "radarMm") =>
    common.length === 0 ? Number.NaN : common.reduce((sum, span) => sum + span[key], 0);
  return {
    ...window,
    gaugeMm: depth("gaugeMm"),
    radarMm: depth("radarMm"),
    commonMs: total("commonMs"),
    gaugeObservedMs: total("gaugeObservedMs"),
    radarObservedMs: total("radarObservedMs"),
    splitMm: total("splitMm"),
    tooCoarse: false,
    asOne: false,
  };
}

function toPair(span: Span, input: PairInput, baseMs: number): Pair {
  const lengthMs = span.endEpochMs - span.startEpochMs;
  const shares = {
    gaugeObservedFraction: span.gaugeObservedMs / lengthMs,
    radarObservedFraction: span.radarObservedMs / lengthMs,
    commonFraction: span.commonMs / lengthMs,
  };
  const reason = whyUnused(span, shares, input, baseMs);
  return {
    startEpochMs: span.startEpochMs,
    endEpochMs: span.endEpochMs,
    network: input.series.network,
    gaugeId: input.series.id,
    gaugeMm: span.tooCoarse ? Number.NaN : span.gaugeMm,
    radarMm: span.tooCoarse ? Number.NaN : span.radarMm,
    radarId: input.radarId,
    ...shares,
    rangeKm: input.rangeKm,
    beamHeightAslM: input.beamHeightAslM,
    used: reason === "",
    reason,
  };
}

function whyUnused(
  span: Span,
  shares: Pick<Pair, "gaugeObservedFraction" | "radarObservedFraction" | "commonFraction">,
  { series, minCommonFraction }: PairInput,
  baseMs: number,
): string {
  const minutes = (ms: number) => `${Number((ms / 60_000).toFixed(2))} min`;
  if (span.tooCoarse) {
    return `gauge reports every ${minutes(series.stepMs ?? 0)}, longer than the interval`;
  }
  if (shares.gaugeObservedFraction === 0) return "no gauge data";
  if (shares.radarObservedFraction === 0) return "radar did not observe";
  if (span.commonMs === 0 && span.asOne) {
    const gauge = percent(shares.gaugeObservedFraction);
    const radar = percent(shares.radarObservedFraction);
    return `each side must observe 95 % of the interval where gauge steps are longer than ${minutes(baseMs)}: gauge ${gauge}, radar ${radar}`;
  }
  if (shares.commonFraction < minCommonFraction - FRACTION_SLACK) {
    return `too little common time: ${percent(shares.commonFraction)}, ${percent(minCommonFraction)} needed`;
  }
  return "";
}

/** Rounded down, so that a share below a limit never reads as the limit. */
function percent(fraction: number): string {
  return `${Math.floor(fraction * 100 + 1e-6)} %`;
}

function checkBorders(interval: Interval, radar: RadarSteps): void {
  const first = (interval.startEpochMs - radar.startEpochMs) / radar.stepMs;
  const last = (interval.endEpochMs - radar.startEpochMs) / radar.stepMs;
  if (!Number.isInteger(first) || !Number.isInteger(last) || last <= first) {
    throw new RangeError("the borders of a pair's interval must be borders of the radar's steps");
  }
  if (first < 0 || last > radar.depthMm.length) {
    throw new RangeError("a pair's interval must lie within the radar's steps");
  }
}
