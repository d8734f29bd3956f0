import type { FieldSamples } from "../evidence.ts";
import { fromDecibels } from "../numbers.ts";
import { type Aligned, fieldOnSteps, gaugeInWindow, MOST_LAG_MS, radarOnSteps } from "./aligned.ts";
import { type Misfit, misfit } from "./misfit.ts";
import { LEAST_WET_STEPS } from "./subject.ts";

/** Share of its observed steps that a gauge must keep under a shift: a small part fits anything. House rule. */
const LEAST_KEPT_SHARE = 0.5;
/** Farther off a gauge is not looked for: it would be another region's. House rule. */
const FARTHEST_KM = 60;
/** What a step counts that an alternative has no rain to hold against. */
const UNSEEN_STEP = 2;

/** What the gauge would have to be for its readings to be right, and how well it then fits. */
export interface Alternative {
  /** Misfit per wet step, steps that are lost counted as if half explained. */
  readonly misfit: number;
  readonly fit: Misfit;
}

export interface ShiftedClock extends Alternative {
  /** By how many minutes stamps are too late; negative where too early. */
  readonly minutesLate: number;
  /** The same for shifts by whole hours. */
  readonly wholeHours: readonly ShiftedClock[];
}

export interface OtherPlace extends Alternative {
  /** From the place in the stations file to the one that fits, km; east and north positive. */
  readonly eastKm: number;
  readonly northKm: number;
  readonly distanceKm: number;
}

export interface OtherFactor extends Alternative {
  /** Gauge over what it should read, in decibels. */
  readonly offsetDb: number;
}

export interface SilentFrom extends Alternative {
  readonly startEpochMs: number;
  readonly endEpochMs: number;
  /** Radar over the silent time, at the level of the place. */
  readonly missedMm: number;
  readonly wholeWindow: boolean;
}

/**
 * A gauge that shows one factor all through the rain: what it is, and how well the gauge fits once it is taken out. A
 * tip then stands for as much more rain.
 */
export function bestFactor(steps: Aligned, ratioDb: number, levelDb: number): OtherFactor | undefined {
  if (!Number.isFinite(ratioDb)) return undefined;
  const offsetDb = ratioDb - levelDb;
  const factor = fromDecibels(offsetDb);
  const gaugeMm = gaugeInWindow(steps).map((mm) => mm / factor);
  const fit = misfit(gaugeMm, steps.radarMm, fromDecibels(levelDb), steps.tipMm / Math.min(1, factor));
  return fit.wetSteps < LEAST_WET_STEPS ? undefined : { misfit: fit.perStep, fit, offsetDb };
}

/** The shift of its clock under which a gauge fits best; steps of five minutes where the radar has them. */
export function bestClock(steps: Aligned, levelDb: number): ShiftedClock | undefined {
  const baseMs = steps.evidence.radar.stepMs;
  const most = Math.floor(MOST_LAG_MS / baseMs);
  let best: Omit<ShiftedClock, "wholeHours"> | undefined;
  const wholeHours: ShiftedClock[] = [];
  for (let shift = -most; shift <= most; shift++) {
    const minutesLate = (shift * baseMs) / 60_000;
    const found = underClock(steps, levelDb, minutesLate);
    if (found === undefined) continue;
    if (minutesLate % 60 === 0 && shift !== 0) wholeHours.push({ ...found, minutesLate, wholeHours: [] });
    if (best === undefined || found.misfit < best.misfit) best = { ...found, minutesLate };
  }
  return best === undefined ? undefined : { ...best, wholeHours };
}

/**
 * How well a gauge fits if its stamps are so many minutes late, in whole steps of the radar.
 *
 * @returns undefined where such a shift leaves too little to compare
 */
export function underClock(
  { evidence, gaugeMm, stepMs, lead, firstBase, tipMm }: Aligned,
  levelDb: number,
  minutesLate: number,
): Alternative | undefined {
  const baseMs = evidence.radar.stepMs;
  const perStep = Math.round(stepMs / baseMs);
  const shift = Math.round((minutesLate * 60_000) / baseMs);
  const radarMm = radarOnSteps(evidence, perStep, gaugeMm.length, firstBase - lead * perStep - shift);
  return alternative(gaugeMm, radarMm, levelDb, tipMm);
}

/** The place of the field at which a gauge fits best. */
export function bestPlace(steps: Aligned, field: FieldSamples, levelDb: number): OtherPlace | undefined {
  const gaugeMm = gaugeInWindow(steps);
  const perStep = Math.round(steps.stepMs / field.stepMs);
  const { xKm, yKm } = steps.evidence;
  let best: OtherPlace | undefined;
  for (let place = 0; place < field.depthMm.length; place++) {
    const eastKm = field.xKm[place] - xKm;
    const northKm = field.yKm[place] - yKm;
    const distanceKm = Math.hypot(eastKm, northKm);
    if (distanceKm > FARTHEST_KM) continue;
    const radarMm = fieldOnSteps(field.depthMm[place], perStep, steps.count, steps.firstBase);
    const found = alternative(gaugeMm, radarMm, levelDb, steps.tipMm, observedSteps(steps.gaugeMm));
    if (found === undefined || (best !== undefined && found.misfit >= best.misfit)) continue;
    best = { ...found, eastKm, northKm, distanceKm };
  }
  return best;
}

/** The run of readings of 0 under which the radar has most rain, and how well the rest fits. */
export function longestSilence(steps: Aligned, levelDb: number): SilentFrom | undefined {
  const gaugeMm = gaugeInWindow(steps);
  const factor = fromDecibels(levelDb);
  let best: { from: number; to: number; missedMm: number } | undefined;
  let from = 0;
  let missedMm = 0;
  for (let k = 0; k < steps.count; k++) {
    if (gaugeMm[k] !== 0) {
      from = k + 1;
      missedMm = 0;
      continue;
    }
    if (!Number.isNaN(steps.radarMm[k])) missedMm += factor * steps.radarMm[k];
    if (missedMm > (best?.missedMm ?? 0)) best = { from, to: k + 1, missedMm };
  }
  if (best === undefined) return undefined;
  const { from: first, to } = best;
  // The radar may go on with nothing: the run ends where the gauge speaks again.
  let end = to;
  while (end < steps.count && gaugeMm[end] === 0) end++;
  const expectedMm = steps.radarMm.map((mm, k) => (k >= first && k < end ? 0 : mm));
  const rest = misfit(gaugeMm, expectedMm, factor, steps.tipMm);
  const { startEpochMs } = steps;
  return {
    misfit: rest.wetSteps === 0 ? 0 : rest.perStep,
    fit: rest,
    startEpochMs: startEpochMs + first * steps.stepMs,
    endEpochMs: startEpochMs + end * steps.stepMs,
    missedMm: best.missedMm,
    wholeWindow: rest.gaugeMm === 0,
  };
}

function alternative(
  gaugeMm: Float64Array,
  radarMm: Float64Array,
  levelDb: number,
  tipMm: number,
  observed: number = observedSteps(gaugeMm),
): Alternative | undefined {
  const fit = misfit(gaugeMm, radarMm, fromDecibels(levelDb), tipMm);
  const most = Math.min(observed, radarMm.length);
  if (fit.steps < LEAST_KEPT_SHARE * most || fit.wetSteps < LEAST_WET_STEPS) return undefined;
  const lost = Math.max(0, most - fit.steps);
  return {
    misfit: (fit.perStep * fit.wetSteps + UNSEEN_STEP * lost) / (fit.wetSteps + lost),
    fit,
  };
}

function observedSteps(gaugeMm: Float64Array): number {
  let count = 0;
  for (const mm of gaugeMm) if (!Number.isNaN(mm)) count++;
  return count;
}
