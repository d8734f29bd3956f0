import type { FieldSamples, JudgeContext } from "../evidence.ts";
import { decibels } from "../numbers.ts";
import { type UnitMistake, unitMistakes } from "../unit-checks.ts";
import type { Aligned } from "./aligned.ts";
import {
  bestClock,
  bestFactor,
  bestPlace,
  longestSilence,
  type OtherFactor,
  type OtherPlace,
  type ShiftedClock,
  type SilentFrom,
} from "./alternatives.ts";
import type { ReferenceLevel } from "./reference-level.ts";
import { rememberedBy } from "./remembered.ts";
import { isJudgeable, JUDGE_MM, misfitAt, type Subject } from "./subject.ts";

/** A gauge fits when its misfit is below this, or below so many times that of sound gauges. House rule. */
const FITS = 5;
const FITS_USUAL = 8;
/** From here on a much better alternative is heeded, even if the gauge fits after a fashion. House rule. */
const FITS_WELL = 3;
/** What an alternative must better the misfit by, and what it may be at most: of a gauge that does not fit; of one that does after a fashion. */
const BETTER = 3;
const MUCH_BETTER = 8;
const GOOD_USUAL = 5;
/** What tips and the radar's own error leave by themselves: even where sound gauges fit better, this is a good fit. */
const CHANCE = 1;
/** Rain that must be missed before silence is a fault, mm. */
const MISSED_MM = 1;
/** Shift of a clock that counts: less is a matter of how rain drifts below the beam. */
const LEAST_MINUTES = 10;
/** Whole hours are how clocks go wrong: the nearest one is taken where it fits nearly as well. House rule. */
const HOUR_MINUTES = 60;
const NEARLY = 1.3;
/** A place must fit by so much better than a clock that is off by whole hours, to be preferred. */
const PLACE_OVER_HOURS = 2;
/** Nearer, another place is a matter of a cell and of drift. House rule. */
const LEAST_DISTANCE_KM = 4;
/** Wet steps from which the likeness with another place, of many hundred, is no chance. */
const PLACE_WET_STEPS = 6;
/** Levels at which changes are looked for: a tenth of a decibel is finer than any of them can tell. */
const LEVELS_PER_DB = 10;
/** How near to the factor of a mistaken unit a gauge must be, dB; farther for one that is small beside the radar's own error. */
const NEAR_UNIT_DB = 1.5;
const NEAR_LARGE_UNIT_DB = 2.5;
const LARGE_UNIT_DB = 9;
/** A funnel that lets less than this share through is blocked, less than the other partly; dB. */
const BLOCKED_DB = -9;
const PARTLY_BLOCKED_DB = -2;
/** A factor counts that is so many spreads of the other gauges away. Common practice. */
const USUAL_SPREADS = 3;
/** Share of a factor above 1, in decibels, that the gauge's depth beside other gauges must bear out: else the radar is low. */
const OWN_SHARE = 0.5;

/** The likeliest reason in a gauge for not fitting the radar, with what speaks for it. */
export type Reason =
  | { readonly kind: "silent"; readonly silent: SilentFrom }
  | { readonly kind: "unit"; readonly factor: OtherFactor; readonly mistakes: readonly UnitMistake[] }
  | { readonly kind: "blocked"; readonly factor: OtherFactor }
  | { readonly kind: "clock"; readonly clock: ShiftedClock }
  | { readonly kind: "place"; readonly place: OtherPlace }
  | { readonly kind: "unknown" };

/** How a gauge fits the radar, and what would make it fit. */
export interface Account {
  readonly subject: Subject;
  readonly judgeable: boolean;
  /** Gauge over radar by the gauges around it, dB. */
  readonly levelDb: number;
  /** Against the radar at the level of the others: around it, or of all, whichever is kinder. */
  readonly misfit: number;
  readonly factor: OtherFactor | undefined;
  /** Looked for only where the gauge does not fit well. */
  readonly clock: ShiftedClock | undefined;
  readonly place: OtherPlace | undefined;
  readonly silent: SilentFrom | undefined;
  /** Undefined where it fits. */
  readonly reason: Reason | undefined;
}

/** Holds a gauge against the radar, as it is and under everything that could be wrong with it. */
export function accountOf(subject: Subject, reference: ReferenceLevel, { field }: JudgeContext): Account {
  const around = reference.at(subject);
  const kinder = misfitAt(subject, around).perStep <= misfitAt(subject, reference.levelDb).perStep;
  const levelDb = kinder ? around : reference.levelDb;
  const misfit = misfitAt(subject, levelDb).perStep;
  const { steps, ratioDb } = subject;
  const judgeable = isJudgeable(subject);
  const base = { subject, judgeable, levelDb, misfit };
  const nothing = { factor: undefined, clock: undefined, place: undefined, silent: undefined };
  if (steps === undefined) return { ...base, ...nothing, reason: undefined };
  if (!judgeable) {
    const clock = misfit >= FITS ? wholeHours(bestClock(steps, levelDb)) : undefined;
    if (clock === undefined || !isClockAlone(clock, misfit, reference)) {
      return { ...base, ...nothing, reason: undefined };
    }
    return { ...base, ...nothing, judgeable: true, clock, reason: { kind: "clock", clock } };
  }
  const factor = bestFactor(steps, ratioDb, levelDb);
  if (misfit < FITS_WELL) return { ...base, ...nothing, factor, reason: undefined };
  const { silent, clock, place } = changesOf(
    steps,
    field,
    Math.round(levelDb * LEVELS_PER_DB) / LEVELS_PER_DB,
  );
  const all = { ...base, factor, silent, clock, place };
  return { ...all, reason: reasonOf(all, reference) };
}

/** What is looked for at great cost, by the level of the place. */
type Changes = Pick<Account, "silent" | "clock" | "place">;

const changesKnown = rememberedBy(
  (_: Aligned) => new Map<number, Changes & { readonly field: FieldSamples | undefined }>(),
);

/** What would make a gauge fit: worked out once for each level. */
function changesOf(steps: Aligned, field: FieldSamples | undefined, levelDb: number): Changes {
  const known = changesKnown(steps).get(levelDb);
  if (known !== undefined && known.field === field) return known;
  const changes = {
    field,
    silent: longestSilence(steps, levelDb),
    clock: wholeHours(bestClock(steps, levelDb)),
    place: field === undefined ? undefined : bestPlace(steps, field, levelDb),
  };
  changesKnown(steps).set(levelDb, changes);
  return changes;
}

function wholeHours(best: ShiftedClock | undefined): ShiftedClock | undefined {
  const hours = best?.wholeHours.find((one) => one.misfit <= NEARLY * best.misfit);
  return hours ?? best;
}

/**
 * The written rule: a gauge that does not fit is explained by the one change that makes it fit.
 *
 * 1. Silence: 0 under rain, and the rest fits. A gauge without any rain is dead; one that fell silent died part way.
 * 2. One factor all through the rain: of a mistaken unit where it sits on one, of a blocked funnel where it is low. A factor
 *    within three spreads of the other gauges is none, nor one above 1 that the depths of other gauges do not bear out: then
 *    the radar is low over the gauge.
 * 3. A shifted clock, or another place: whichever fits better; a shift of whole hours is preferred to a place that is
 *    not twice as good, since clocks go wrong by whole hours and one of many places always fits a little.
 *
 * Whichever leaves the least misfit is taken. None counts unless it betters the misfit threefold (eightfold where the
 * gauge fits after a fashion) and leaves no more than sound gauges have.
 */
function reasonOf(account: Omit<Account, "reason">, reference: ReferenceLevel): Reason | undefined {
  const { usualMisfit } = reference;
  const { misfit, silent, factor, clock, place, subject } = account;
  const fits = misfit < Math.max(FITS, FITS_USUAL * usualMisfit);
  const most = Math.min(
    misfit / (fits ? MUCH_BETTER : BETTER),
    fits ? usualMisfit : Math.max(CHANCE, GOOD_USUAL * usualMisfit),
  );
  const reasons: { readonly misfit: number; readonly reason: Reason | undefined }[] = [];
  if (silent !== undefined && silent.missedMm >= MISSED_MM) {
    reasons.push({ misfit: silent.misfit, reason: { kind: "silent", silent } });
  }
  if (factor !== undefined) {
    const mistakes = mistakesNear(subject, factor.offsetDb);
    if (!isOwnFactor(subject, factor, reference)) reasons.push({ misfit: factor.misfit, reason: undefined });
    else if (mistakes.length > 0) {
      reasons.push({ misfit: factor.misfit, reason: { kind: "unit", factor, mistakes } });
    } else if (factor.offsetDb <= PARTLY_BLOCKED_DB) {
      reasons.push({ misfit: factor.misfit, reason: { kind: "blocked", factor } });
    }
  }
  const shift = clock !== undefined && Math.abs(clock.minutesLate) >= LEAST_MINUTES ? clock : undefined;
  const elsewhere =
    place !== undefined && place.distanceKm >= LEAST_DISTANCE_KM && place.fit.wetSteps >= PLACE_WET_STEPS
      ? place
      : undefined;
  if (shift !== undefined && !isBeatenBy(shift, elsewhere)) {
    reasons.push({ misfit: shift.misfit, reason: { kind: "clock", clock: shift } });
  } else if (elsewhere !== undefined) {
    reasons.push({ misfit: elsewhere.misfit, reason: { kind: "place", place: elsewhere } });
  }
  const best = reasons.filter((one) => one.misfit <= most).sort((a, b) => a.misfit - b.misfit)[0];
  if (best !== undefined) return best.reason;
  return fits ? undefined : { kind: "unknown" };
}

/**
 * Whether a factor is the gauge's own: beyond the spread of the others and, where the gauge reads more than the radar,
 * borne out by what other gauges read.
 */
function isOwnFactor(subject: Subject, { offsetDb }: OtherFactor, reference: ReferenceLevel): boolean {
  if (Math.abs(offsetDb) < USUAL_SPREADS * reference.spreadDb(subject)) return false;
  return offsetDb < 0 || decibels(subject.plain.gaugeMm / reference.medianMm) >= OWN_SHARE * offsetDb;
}

/**
 * Whether a shift by whole hours explains a gauge that has too little rain beside the radar as its stamps stand, since they
 * put most of its rain outside the window.
 */
function isClockAlone(
  { minutesLate, fit, misfit }: ShiftedClock,
  asItStands: number,
  reference: ReferenceLevel,
) {
  return (
    minutesLate !== 0 &&
    minutesLate % HOUR_MINUTES === 0 &&
    Math.min(fit.gaugeMm, fit.expectedMm) >= JUDGE_MM &&
    fit.wetSteps >= PLACE_WET_STEPS &&
    misfit <= Math.min(asItStands / BETTER, GOOD_USUAL * reference.usualMisfit)
  );
}

function isBeatenBy(clock: ShiftedClock, place: OtherPlace | undefined): boolean {
  if (place === undefined) return false;
  const isHours = clock.minutesLate % HOUR_MINUTES === 0;
  return place.misfit * (isHours ? PLACE_OVER_HOURS : 1) < clock.misfit;
}

/** Mistaken units whose factor a gauge sits on, the nearest first. */
export function mistakesNear({ evidence }: Subject, offsetDb: number): readonly UnitMistake[] {
  const { stepMs, resolutionMm } = evidence.series;
  const missDb = ({ factor }: UnitMistake) => Math.abs(offsetDb - decibels(factor));
  return unitMistakes(stepMs, resolutionMm)
    .filter((mistake) => {
      const isLarge = Math.abs(decibels(mistake.factor)) >= LARGE_UNIT_DB;
      return missDb(mistake) <= (isLarge ? NEAR_LARGE_UNIT_DB : NEAR_UNIT_DB);
    })
    .sort((a, b) => missDb(a) - missDb(b));
}

/** Whether a funnel lets next to nothing through. */
export function isBlockedWhole({ offsetDb }: OtherFactor): boolean {
  return offsetDb <= BLOCKED_DB;
}
