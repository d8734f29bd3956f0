import type { Pair } from "@rainreckon/core";
import { decibels, fromDecibels } from "../numbers.ts";
import { rememberedBy } from "./remembered.ts";
import type { Subject } from "./subject.ts";

/** Rain rates above and below which heavy and light rain are compared, mm/h; and steps of each. House rule. */
const HEAVY_MM_PER_HOUR = 15;
const LIGHT_MM_PER_HOUR = 8;
const LEAST_STEPS = 4;

/** How much less a gauge reads beside the radar in heavy rain than in light rain; the ratio of sums of either, in decibels. */
export const rateDependence = rememberedBy(rateDifference);

function rateDifference({ steps }: Subject): { differenceDb: number; heavySteps: number } | undefined {
  if (steps === undefined) return undefined;
  const hours = steps.stepMs / 3_600_000;
  const heavy = { gaugeMm: 0, radarMm: 0, count: 0 };
  const light = { gaugeMm: 0, radarMm: 0, count: 0 };
  for (let k = 0; k < steps.count; k++) {
    const gaugeMm = steps.gaugeMm[steps.lead + k];
    const radarMm = steps.radarMm[k];
    if (!(gaugeMm + radarMm > 0)) continue;
    const into =
      radarMm >= HEAVY_MM_PER_HOUR * hours ? heavy : radarMm <= LIGHT_MM_PER_HOUR * hours ? light : undefined;
    if (into === undefined) continue;
    into.gaugeMm += gaugeMm;
    into.radarMm += radarMm;
    into.count++;
  }
  if (heavy.count < LEAST_STEPS || light.count < LEAST_STEPS || light.gaugeMm === 0) return undefined;
  const differenceDb = decibels(heavy.gaugeMm / heavy.radarMm) - decibels(light.gaugeMm / light.radarMm);
  return Number.isFinite(differenceDb) ? { differenceDb, heavySteps: heavy.count } : undefined;
}

/** Slopes of a double-mass curve before and after a break. */
export interface MassBreak {
  readonly slopeBefore: number;
  readonly slopeAfter: number;
  /** What later values have to be multiplied by to be brought to the earlier level. */
  readonly correction: number;
  /** Means of the single ratios and their two-sample t statistic (equal variances). */
  readonly meanBefore: number;
  readonly meanAfter: number;
  readonly t: number;
}

/**
 * Double-mass analysis at a given break: slopes as ratios of totals (Kohler, 1949, Monthly Weather Review 77, 96-97).
 *
 * @param reference - depths of the reference, best the mean of several stations; all above 0
 * @param values - depths of the station under test
 * @param breakAfter - how many values lie before the break; at least two on either side
 */
export function massBreak(
  reference: readonly number[],
  values: readonly number[],
  breakAfter: number,
): MassBreak {
  const sum = (of: readonly number[]) => of.reduce((total, value) => total + value, 0);
  const slope = (from: number, to: number) => sum(values.slice(from, to)) / sum(reference.slice(from, to));
  const slopeBefore = slope(0, breakAfter);
  const slopeAfter = slope(breakAfter, values.length);
  const ratios = values.map((value, i) => value / reference[i]);
  const before = ratios.slice(0, breakAfter);
  const after = ratios.slice(breakAfter);
  const mean = (of: readonly number[]) => sum(of) / of.length;
  const squares = (of: readonly number[]) => sum(of.map((value) => (value - mean(of)) ** 2));
  const variance = (squares(before) + squares(after)) / (values.length - 2);
  const t = (mean(before) - mean(after)) / Math.sqrt(variance * (1 / before.length + 1 / after.length));
  return {
    slopeBefore,
    slopeAfter,
    correction: slopeBefore / slopeAfter,
    meanBefore: mean(before),
    meanAfter: mean(after),
    t,
  };
}

/** Wet intervals on either side of a break; the mean of the others that makes an interval wet, mm. */
const LEAST_INTERVALS = 8;
const WET_MM = 1;
/** A break counts from this t and this change of the slope, dB: breaks are looked for at every interval. House rule. */
const LEAST_T = 6;
const LEAST_CHANGE_DB = 1.5;

/** The clearest break of a gauge's double-mass curve against the mean of the others; undefined where none is clear. */
export function doubleMassBreak(
  own: readonly Pair[],
  others: readonly (readonly Pair[])[],
): { readonly factor: number; readonly breakEpochMs: number; readonly t: number } | undefined {
  const reference: number[] = [];
  const values: number[] = [];
  const startsMs: number[] = [];
  own.forEach((pair, k) => {
    if (!pair.used) return;
    const depths = others.map((pairs) => pairs[k]).filter((one) => one?.used === true);
    const mean = depths.reduce((sum, one) => sum + one.gaugeMm, 0) / depths.length;
    if (depths.length < 3 || !(mean >= WET_MM)) return;
    reference.push(mean);
    values.push(pair.gaugeMm);
    startsMs.push(pair.startEpochMs);
  });
  let best: { factor: number; breakEpochMs: number; t: number } | undefined;
  for (let at = LEAST_INTERVALS; at <= values.length - LEAST_INTERVALS; at++) {
    const { correction, t } = massBreak(reference, values, at);
    if (Math.abs(t) <= Math.max(LEAST_T, Math.abs(best?.t ?? 0))) continue;
    if (Math.abs(decibels(correction)) < LEAST_CHANGE_DB) continue;
    best = { factor: fromDecibels(-decibels(correction)), breakEpochMs: startsMs[at], t };
  }
  return best;
}
