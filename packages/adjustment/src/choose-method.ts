import { type CrossValidation, crossValidate, foldsOf } from "./cross-validation.ts";
import {
  type LearnedMethod,
  learnMethod,
  METHOD_NAMES,
  type MethodName,
  type MethodSettings,
} from "./methods.ts";
import type { WindowGauge } from "./window-gauges.ts";

/** A candidate and how well it met gauges that it did not know. */
export interface Candidate {
  readonly name: MethodName;
  /** Root mean square and mean of the errors of window depths, adjusted minus gauge, mm. */
  readonly errorMm: number;
  readonly meanErrorMm: number;
  readonly gaugeCount: number;
  /** In how many of the trainings a simpler way stood in, and for what. */
  readonly notes: readonly string[];
}

export interface MethodChoice {
  readonly chosen: MethodName;
  /** All of them, the simpler first. */
  readonly candidates: readonly Candidate[];
}

/** A candidate is as good as the best when its error is within this share of it. House rule. */
const AS_GOOD_WITHIN = 0.02;
/** Less than this is rounding, mm. */
const ROUNDING_MM = 1e-3;
/** Up to so many gauges each is held out alone: among candidates, and around the whole choice. */
const CANDIDATES_ALONE_UP_TO = 60;
const CHOICE_ALONE_UP_TO = 30;

/** The rule in words, for people. */
export const CHOICE_RULE =
  "the smallest root mean square error of window depths at gauges held out in turn; of methods within 2 % of it, the simplest";

/** Cross-validates one method; variograms, factors and fallbacks are made anew in every fold. */
export function validateMethod(
  name: MethodName,
  gauges: readonly WindowGauge[],
  settings: MethodSettings,
): CrossValidation {
  return crossValidate(gauges, foldsOf(gauges.length, CANDIDATES_ALONE_UP_TO), (others) =>
    learnMethod(name, others, settings),
  );
}

/**
 * Cross-validates every method and picks one: {@link CHOICE_RULE}.
 *
 * A method that leaves a judged gauge without a figure is no candidate for the choice, but it is listed.
 */
export function chooseMethod(gauges: readonly WindowGauge[], settings: MethodSettings): MethodChoice {
  const candidates = METHOD_NAMES.map((name): Candidate => {
    const validation = validateMethod(name, gauges, settings);
    const { meanErrorMm, gaugeCount, withoutFigure } = validation;
    return {
      name,
      errorMm: withoutFigure > 0 ? Number.NaN : validation.errorMm,
      meanErrorMm: withoutFigure > 0 ? Number.NaN : meanErrorMm,
      gaugeCount,
      notes: countedNotes(validation, withoutFigure),
    };
  });
  const least = Math.min(...candidates.map(({ errorMm }) => errorMm).filter(Number.isFinite));
  const chosen = candidates.find(({ errorMm }) => errorMm <= least * (1 + AS_GOOD_WITHIN) + ROUNDING_MM);
  return { chosen: chosen?.name ?? "mean-field-bias", candidates };
}

/**
 * How well the whole procedure meets gauges: around the choice of a method stands another round of holding
 * out, so that no gauge is judged by a method that it helped to choose. This, and not the winner's own error,
 * is the error to publish.
 */
export function validateChoice(
  gauges: readonly WindowGauge[],
  settings: MethodSettings,
): { readonly validation: CrossValidation; readonly chosenInFolds: ReadonlyMap<MethodName, number> } {
  const chosenInFolds = new Map<MethodName, number>();
  const validation = crossValidate(
    gauges,
    foldsOf(gauges.length, CHOICE_ALONE_UP_TO),
    (others): LearnedMethod => {
      const { chosen } = chooseMethod(others, settings);
      chosenInFolds.set(chosen, (chosenInFolds.get(chosen) ?? 0) + 1);
      return learnMethod(chosen, others, settings);
    },
  );
  return { validation, chosenInFolds };
}

function countedNotes({ gauges }: CrossValidation, withoutFigure: number): string[] {
  const times = new Map<string, number>();
  const learned = new Set(gauges.map((held) => held.learned));
  for (const { notes } of learned) {
    for (const note of new Set(notes)) times.set(note, (times.get(note) ?? 0) + 1);
  }
  const notes = [...times].map(([note, count]) => `${note} (${count} of ${learned.size} folds)`);
  return withoutFigure > 0 ? [...notes, `no figure at ${withoutFigure} gauges: not chosen`] : notes;
}
