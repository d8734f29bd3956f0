import type { Interval } from "@rainreckon/core";
import type { RateLayer } from "@rainreckon/mosaic";
import {
  type FieldShape,
  type RadarIntegrator,
  type RadarStep,
  type Stretch,
  stretchDepthMm,
} from "./integrate.ts";

/** Time that may be missing from a step before it counts as partly observed: rounding of float32 milliseconds. */
const FULL_SLACK_MS = 2;

/** One step of all radars together. Shapes [cells] unless said otherwise. */
export interface BlendedStep {
  /** Depth over the time that at least one radar observed; NaN where none did. */
  readonly depthMm: Float64Array;
  readonly observedMs: Float64Array;
  readonly bridgedMs: Float64Array;
  readonly edgeMs: Float64Array;
  readonly cappedMm: Float64Array;
  /** Beam height above mean sea level times the milliseconds it held. */
  readonly heightMMs: Float64Array;
  /** Shape [radars][cells]: milliseconds of the step that each radar spoke for, by weight; they sum to observedMs. */
  readonly shareMs: readonly Float64Array[];
  /** Shape [variants][headline cells]. */
  readonly variantMm: readonly Float64Array[];
  /**
   * Shape [companions][cells], undefined where 0 everywhere. By depth: millimetres times the value; by time: hours
   * times the value, both by the shares of the radars. Tolls: millimetres, those of all radars together.
   */
  readonly companions: (Float64Array | undefined)[];
}

/** What one radar adds at one cell of a step: depth, the time it speaks for, and parts of the two. */
interface Voice {
  depthMm: number;
  cappedMm: number;
  shareMs: number;
  bridgedMs: number;
  edgeMs: number;
}

/** A radar that speaks for all it observed in the step, by a share of it. */
function speakWhole(voice: Voice, radar: RadarStep, cell: number, share: number, depthMm: number): void {
  voice.depthMm = share * depthMm;
  voice.cappedMm = share * (radar.cappedMm?.[cell] ?? 0);
  voice.bridgedMs = share * (radar.bridgedMs?.[cell] ?? 0);
  voice.edgeMs = share * (radar.edgeMs?.[cell] ?? 0);
}

/**
 * Blends the depths of one step of several radars: D = Σ w·D_r / Σ w over the radars that observed.
 *
 * Weights are those of the step, constant on spans of unchanged availability: where one radar saw only
 * part of the step, the step is cut where its view begins or ends and each span is blended on its own.
 * Depths of the same span are blended, never rates of different minutes.
 */
export function blendStep(
  step: Interval,
  stepIndex: number,
  radars: readonly { readonly step: RadarStep; readonly integrator: RadarIntegrator }[],
  shape: FieldShape,
): BlendedStep {
  const { cellCount, headlineCells, variantCount } = shape;
  const lengthMs = step.endEpochMs - step.startEpochMs;
  const blended: BlendedStep = {
    depthMm: new Float64Array(cellCount).fill(Number.NaN),
    observedMs: new Float64Array(cellCount),
    bridgedMs: new Float64Array(cellCount),
    edgeMs: new Float64Array(cellCount),
    cappedMm: new Float64Array(cellCount),
    heightMMs: new Float64Array(cellCount),
    shareMs: radars.map(() => new Float64Array(cellCount)),
    variantMm: Array.from({ length: variantCount }, () =>
      new Float64Array(headlineCells.length).fill(Number.NaN),
    ),
    companions: (shape.companions ?? []).map(() => undefined),
  };
  const voices: Voice[] = radars.map(() => ({
    depthMm: 0,
    cappedMm: 0,
    shareMs: 0,
    bridgedMs: 0,
    edgeMs: 0,
  }));
  const voicesAt = (
    cell: number,
    depthOf: (radar: number) => number,
    rateOf: (layer: RateLayer) => number,
  ): boolean => {
    let observing = 0;
    let full = 0;
    let only = -1;
    for (let r = 0; r < radars.length; r++) {
      const observedMs = radars[r].step.observedMs[cell];
      if (!(observedMs > 0)) continue;
      observing++;
      only = r;
      if (observedMs >= lengthMs - FULL_SLACK_MS) full++;
    }
    if (observing === 0) return false;
    for (const voice of voices) {
      voice.depthMm = 0;
      voice.cappedMm = 0;
      voice.shareMs = 0;
      voice.bridgedMs = 0;
      voice.edgeMs = 0;
    }
    if (observing === 1) {
      speakWhole(voices[only], radars[only].step, cell, 1, depthOf(only));
      voices[only].shareMs = Math.min(lengthMs, radars[only].step.observedMs[cell]);
      return true;
    }
    if (full === observing) {
      let sum = 0;
      for (const { step: radar } of radars) if (radar.observedMs[cell] > 0) sum += meanWeight(radar, cell);
      for (let r = 0; r < radars.length; r++) {
        if (!(radars[r].step.observedMs[cell] > 0)) continue;
        const share = meanWeight(radars[r].step, cell) / sum;
        speakWhole(voices[r], radars[r].step, cell, share, depthOf(r));
        voices[r].shareMs = share * lengthMs;
      }
      return true;
    }
    blendSpans(step, stepIndex, cell, radars, rateOf, voices);
    return true;
  };

  for (let cell = 0; cell < cellCount; cell++) {
    const seen = voicesAt(
      cell,
      (radar) => radars[radar].step.depthMm[cell],
      (layer) => layer.rateMmPerHour[cell],
    );
    if (!seen) continue;
    let depthMm = 0;
    for (let r = 0; r < radars.length; r++) {
      const { step: radar } = radars[r];
      const { depthMm: ownMm, cappedMm, shareMs, bridgedMs, edgeMs } = voices[r];
      if (shareMs === 0) continue;
      depthMm += ownMm;
      blended.observedMs[cell] += shareMs;
      blended.shareMs[r][cell] = shareMs;
      // Gridded rain has no beam: NaN. Its time is left out where the mean height is made.
      const heightMMs = radar.heightMMs[cell];
      if (!Number.isNaN(heightMMs)) blended.heightMMs[cell] += (shareMs / radar.observedMs[cell]) * heightMMs;
      blended.bridgedMs[cell] += bridgedMs;
      blended.edgeMs[cell] += edgeMs;
      blended.cappedMm[cell] += cappedMm;
    }
    blended.depthMm[cell] = depthMm;
  }
  for (let v = 0; v < variantCount; v++) {
    for (let h = 0; h < headlineCells.length; h++) {
      const seen = voicesAt(
        headlineCells[h],
        (radar) => radars[radar].step.variantMm[v][h],
        (layer) => layer.variants[v][h],
      );
      if (seen) blended.variantMm[v][h] = voices.reduce((sum, voice) => sum + voice.depthMm, 0);
    }
  }
  return blended;
}

/** Blend weight of a radar at a cell over the time it observed. */
function meanWeight(radar: RadarStep, cell: number): number {
  return radar.weightMs[cell] / radar.observedMs[cell];
}

/** The general case: cuts the step where any radar's view begins or ends and blends each span on its own. */
function blendSpans(
  step: Interval,
  stepIndex: number,
  cell: number,
  radars: readonly { readonly step: RadarStep; readonly integrator: RadarIntegrator }[],
  rateOf: (layer: RateLayer) => number,
  voices: readonly Voice[],
): void {
  const stretches: Stretch[][] = radars.map(({ integrator }) =>
    integrator.stretches(stepIndex, cell, rateOf),
  );
  const capped = radars.map(({ step: radar, integrator }) =>
    (radar.cappedMm?.[cell] ?? 0) > 0 ? integrator.stretches(stepIndex, cell, cappedRateAt(cell)) : [],
  );
  const borders = new Set([step.startEpochMs, step.endEpochMs]);
  for (const ofRadar of stretches) {
    for (const { fromEpochMs, toEpochMs } of ofRadar) {
      if (fromEpochMs > step.startEpochMs && fromEpochMs < step.endEpochMs) borders.add(fromEpochMs);
      if (toEpochMs > step.startEpochMs && toEpochMs < step.endEpochMs) borders.add(toEpochMs);
    }
  }
  const cuts = [...borders].sort((a, b) => a - b);
  for (let k = 0; k + 1 < cuts.length; k++) {
    const [from, to] = [cuts[k], cuts[k + 1]];
    let weightSum = 0;
    const speaking: { radar: number; weight: number; depthMm: number; kind: Stretch["kind"] }[] = [];
    for (let r = 0; r < radars.length; r++) {
      const stretch = stretchOver(stretches[r], from, to);
      if (stretch === undefined) continue;
      const weight = meanWeight(radars[r].step, cell);
      weightSum += weight;
      speaking.push({ radar: r, weight, depthMm: stretchDepthMm(stretch, from, to), kind: stretch.kind });
    }
    for (const { radar, weight, depthMm, kind } of speaking) {
      const voice = voices[radar];
      const share = weight / weightSum;
      const ms = share * (to - from);
      voice.depthMm += share * depthMm;
      voice.shareMs += ms;
      if (kind === "bridged") voice.bridgedMs += ms;
      if (kind === "edge") voice.edgeMs += ms;
      const cap = stretchOver(capped[radar], from, to);
      if (cap !== undefined) voice.cappedMm += share * stretchDepthMm(cap, from, to);
    }
  }
}

/** The part of a layer's rate that met the cap; NaN where it did not observe the cell. */
function cappedRateAt(cell: number): (layer: RateLayer) => number {
  return ({ rateMmPerHour, cappedRateMmPerHour }) =>
    rateMmPerHour[cell] >= 0 ? (cappedRateMmPerHour?.[cell] ?? 0) : Number.NaN;
}

function stretchOver(stretches: readonly Stretch[], from: number, to: number): Stretch | undefined {
  return stretches.find(({ fromEpochMs, toEpochMs }) => fromEpochMs <= from && toEpochMs >= to);
}
