import { type Interval, MS_PER_HOUR } from "@rainreckon/core";
import type { CompanionKind, CompanionValue } from "@rainreckon/mosaic";
import type { BlendedStep } from "./blend.ts";

/**
 * One grid interval as it is stored: everything in float32, since the totals are sums of what is stored.
 * Shapes [cells] unless said otherwise. Times are in milliseconds, heights in metres times milliseconds.
 */
export interface IntervalFields extends Interval {
  /** Depth over the time observed; NaN where nothing was. */
  readonly depthMm: Float32Array;
  readonly observedMs: Float32Array;
  readonly bridgedMs: Float32Array;
  readonly edgeMs: Float32Array;
  readonly cappedMm: Float32Array;
  readonly heightMMs: Float32Array;
  /** Shape [radars][cells]. */
  readonly shareMs: readonly Float32Array[];
  /** Shape [variants][headline cells]. */
  readonly variantMm: readonly Float32Array[];
  /** Shape [companions][cells], undefined where 0 everywhere; as in {@link BlendedStep}. */
  readonly companions: readonly (Float32Array | undefined)[];
}

/** Sums in float64, made once per interval or total; NaN only where nothing was ever added. */
export class FieldSum {
  readonly depthMm: Float64Array;
  readonly observedMs: Float64Array;
  readonly bridgedMs: Float64Array;
  readonly edgeMs: Float64Array;
  readonly cappedMm: Float64Array;
  readonly heightMMs: Float64Array;
  readonly shareMs: readonly Float64Array[];
  readonly variantMm: readonly Float64Array[];
  readonly companionKinds: readonly CompanionKind[];
  /** Shape [companions][cells], undefined where 0 everywhere; as in {@link BlendedStep}. */
  readonly companions: (Float64Array | undefined)[];

  constructor(
    cellCount: number,
    radarCount: number,
    variantCount: number,
    headlineCount: number,
    companions: readonly CompanionValue[] = [],
  ) {
    const zeros = () => new Float64Array(cellCount);
    this.depthMm = zeros().fill(Number.NaN);
    this.observedMs = zeros();
    this.bridgedMs = zeros();
    this.edgeMs = zeros();
    this.cappedMm = zeros();
    this.heightMMs = zeros();
    this.shareMs = Array.from({ length: radarCount }, zeros);
    this.variantMm = Array.from({ length: variantCount }, () =>
      new Float64Array(headlineCount).fill(Number.NaN),
    );
    this.companionKinds = companions.map(({ kind }) => kind);
    this.companions = companions.map(() => undefined);
  }

  /** Adds a step, or a stored interval; call in time order, so that any split of a run adds up alike. */
  add(part: BlendedStep | IntervalFields): void {
    addKnown(this.depthMm, part.depthMm);
    addAll(this.observedMs, part.observedMs);
    addAll(this.bridgedMs, part.bridgedMs);
    addAll(this.edgeMs, part.edgeMs);
    addAll(this.cappedMm, part.cappedMm);
    addAll(this.heightMMs, part.heightMMs);
    for (let r = 0; r < this.shareMs.length; r++) addAll(this.shareMs[r], part.shareMs[r]);
    for (let v = 0; v < this.variantMm.length; v++) addKnown(this.variantMm[v], part.variantMm[v]);
    for (let c = 0; c < this.companions.length; c++) {
      const values = part.companions[c];
      if (values === undefined) continue;
      const sum = this.companions[c] ?? new Float64Array(values.length);
      this.companions[c] = sum;
      addAll(sum, values);
    }
  }

  toInterval(interval: Interval): IntervalFields {
    return {
      startEpochMs: interval.startEpochMs,
      endEpochMs: interval.endEpochMs,
      depthMm: new Float32Array(this.depthMm),
      observedMs: new Float32Array(this.observedMs),
      bridgedMs: new Float32Array(this.bridgedMs),
      edgeMs: new Float32Array(this.edgeMs),
      cappedMm: new Float32Array(this.cappedMm),
      heightMMs: new Float32Array(this.heightMMs),
      shareMs: this.shareMs.map((share) => new Float32Array(share)),
      variantMm: this.variantMm.map((variant) => new Float32Array(variant)),
      companions: this.companions.map((values) =>
        values === undefined ? undefined : new Float32Array(values),
      ),
    };
  }
}

/** sum += part, both known everywhere. */
function addAll(sum: Float64Array, part: Float64Array | Float32Array): void {
  for (let i = 0; i < sum.length; i++) sum[i] += part[i];
}

/** sum += part where part is known; a sum that was NaN starts at the first known part. */
function addKnown(sum: Float64Array, part: Float64Array | Float32Array): void {
  for (let i = 0; i < sum.length; i++) {
    const value = part[i];
    if (Number.isNaN(value)) continue;
    const before = sum[i];
    sum[i] = Number.isNaN(before) ? value : before + value;
  }
}

/** What stands beside the total. Shapes [cells]; NaN where nothing was observed, observedFraction excepted. */
export interface TotalPlanes {
  readonly totalMm: Float32Array;
  readonly observedFraction: Float32Array;
  readonly bridgedFraction: Float32Array;
  readonly edgeFraction: Float32Array;
  /** Depth-weighted: share of the total that came from gates at the cap. */
  readonly cappedFraction: Float32Array;
  /** Time-weighted. */
  readonly beamHeightAslM: Float32Array;
  /** Shape [radars][cells]: shares of the observed time, by weight; they sum to 1 where anything was observed. */
  readonly radarShare: readonly Float32Array[];
  /**
   * Shape [companions][cells]. By depth: the mean by depth, NaN where there is none. By time: the mean by time
   * observed. Tolls: millimetres, 0 where there was none, never NaN.
   */
  readonly companions: readonly Float32Array[];
}

/**
 * The planes of a window from the sums of its intervals. Observed, bridged and edge fractions are shares of
 * the whole window. The beam height is the mean over the time that sources with a beam spoke for, NaN where none did.
 *
 * @param withBeam - how many sources, the first of all, have a beam: gridded rain, which has none, stands behind them
 */
export function totalPlanes(
  sum: FieldSum,
  windowMs: number,
  withBeam: number = sum.shareMs.length,
): TotalPlanes {
  const over = (part: Float64Array, whole: (i: number) => number) =>
    Float32Array.from(part, (value, i) => value / whole(i));
  const observed = (i: number) => (sum.observedMs[i] > 0 ? sum.observedMs[i] : Number.NaN);
  const ofBeams = (i: number) => {
    if (withBeam === sum.shareMs.length) return observed(i);
    const ms = sum.shareMs.slice(0, withBeam).reduce((total, share) => total + share[i], 0);
    return ms > 0 ? ms : Number.NaN;
  };
  return {
    totalMm: Float32Array.from(sum.depthMm),
    observedFraction: over(sum.observedMs, () => windowMs).map((value) => Math.min(1, value)),
    bridgedFraction: over(sum.bridgedMs, (i) => (sum.observedMs[i] > 0 ? windowMs : Number.NaN)),
    edgeFraction: over(sum.edgeMs, (i) => (sum.observedMs[i] > 0 ? windowMs : Number.NaN)),
    cappedFraction: Float32Array.from(sum.cappedMm, (value, i) => {
      if (!(sum.observedMs[i] > 0)) return Number.NaN;
      return sum.depthMm[i] > 0 ? Math.min(1, value / sum.depthMm[i]) : 0;
    }),
    beamHeightAslM: over(sum.heightMMs, ofBeams),
    radarShare: sum.shareMs.map((share) => over(share, observed)),
    companions: sum.companionKinds.map((kind, c) => companionPlane(sum, kind, sum.companions[c])),
  };
}

function companionPlane(sum: FieldSum, kind: CompanionKind, values: Float64Array | undefined): Float32Array {
  const plane = new Float32Array(sum.depthMm.length);
  if (values !== undefined) plane.set(values);
  if (kind === "toll") return plane;
  for (let cell = 0; cell < plane.length; cell++) {
    const whole = kind === "depth" ? sum.depthMm[cell] : sum.observedMs[cell] / MS_PER_HOUR;
    plane[cell] = whole > 0 ? (values?.[cell] ?? 0) / whole : Number.NaN;
  }
  return plane;
}
