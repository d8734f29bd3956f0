import type { Interval } from "@rainreckon/core";
import type { GaugeEvidence } from "../evidence.ts";
import { decibels, fromDecibels } from "../numbers.ts";
import { findImpossibleReading, findSpike, type ReadingFinding } from "../reading-checks.ts";
import { type Aligned, aligned, gaugeInWindow } from "./aligned.ts";
import { type Misfit, misfit } from "./misfit.ts";
import { rememberedBy } from "./remembered.ts";

/** Rain on either side from which a gauge can be judged by the radar. House rule. */
export const JUDGE_MM = 3;
/** Wet steps below which a likeness may be chance. House rule. */
export const LEAST_WET_STEPS = 3;

/** A gauge under judgement: its steps beside the radar's, without readings that no rain made. */
export interface Subject {
  readonly evidence: GaugeEvidence;
  readonly impossible: ReadingFinding | undefined;
  readonly spike: (ReadingFinding & { readonly radarMm: number }) | undefined;
  /** Undefined where the gauge is too coarse to follow rain. */
  readonly steps: Aligned | undefined;
  /** Against the radar as it is, over the window. */
  readonly plain: Misfit;
  /** 10 log10(gauge / radar) over the steps both observed; NaN where either has none. */
  readonly ratioDb: number;
}

/** Whether there was rain enough, on either side, to hold the two together. */
export function isJudgeable({ plain }: Subject): boolean {
  return Math.max(plain.gaugeMm, plain.expectedMm) >= JUDGE_MM && plain.wetSteps >= LEAST_WET_STEPS;
}

const subjectsOf = rememberedBy((_: GaugeEvidence) => new Map<string, Subject>());

export function subjectOf(evidence: GaugeEvidence, window: Interval): Subject {
  const known = subjectsOf(evidence);
  const key = `${window.startEpochMs} ${window.endEpochMs}`;
  const subject = known.get(key) ?? freshSubject(evidence, window);
  known.set(key, subject);
  return subject;
}

function freshSubject(evidence: GaugeEvidence, window: Interval): Subject {
  const { series, whole, radar } = evidence;
  const impossible = findImpossibleReading(series, window);
  const spike = findSpike(series, window, radar);
  const raw = aligned(evidence, window);
  const steps = raw === undefined ? undefined : without(raw, [impossible, spike], window);
  const plain =
    steps === undefined
      ? misfit([whole.gaugeMm], [whole.radarMm], 1, series.resolutionMm ?? 0.1)
      : misfit(gaugeInWindow(steps), steps.radarMm, 1, steps.tipMm);
  return {
    evidence,
    impossible,
    spike,
    steps,
    plain,
    ratioDb: decibels(plain.gaugeMm / plain.expectedMm),
  };
}

/** The same steps, those that hold one of the readings not observed. */
function without(
  steps: Aligned,
  readings: readonly (ReadingFinding | undefined)[],
  window: Interval,
): Aligned {
  const gaugeMm = steps.gaugeMm.slice();
  for (const reading of readings) {
    if (reading === undefined) continue;
    const step = Math.ceil((reading.endEpochMs - window.startEpochMs) / steps.stepMs) - 1 + steps.lead;
    if (step >= 0 && step < gaugeMm.length) gaugeMm[step] = Number.NaN;
  }
  return { ...steps, gaugeMm };
}

/** Against the radar times a level, over the window. */
export function misfitAt({ steps, plain }: Subject, levelDb: number): Misfit {
  if (steps === undefined) return plain;
  return misfit(gaugeInWindow(steps), steps.radarMm, fromDecibels(levelDb), steps.tipMm);
}
