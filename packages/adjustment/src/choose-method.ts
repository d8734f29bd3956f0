import { type CrossValidation, crossValidate } from "./cross-validation.ts";
import { clustersOf, foldsOf } from "./folds.ts";
import { METHOD_NAMES, type MethodName, type MethodSettings } from "./methods.ts";
import { TRUST_ALL, type Trial, Trials, type TrustRule } from "./trials.ts";
import type { WindowGauge } from "./window-gauges.ts";

/** A candidate and how well it met gauges that it did not know. */
export interface Candidate {
  readonly name: MethodName;
  /** Root mean square and mean of the errors of window depths at gauges held out one by one, adjusted minus gauge, mm. */
  readonly errorMm: number;
  readonly meanErrorMm: number;
  /** Root mean square of the errors at gauges held out with their whole cluster, mm. */
  readonly clusterErrorMm: number;
  readonly gaugeCount: number;
  /** In how many of the trainings a simpler way stood in, and for what. */
  readonly notes: readonly string[];
}

export interface MethodChoice {
  readonly chosen: MethodName;
  /** All of them, the simpler first. */
  readonly candidates: readonly Candidate[];
}

/** The choice, and how well the whole procedure meets gauges that had no part in it. */
export interface ValidatedChoice extends MethodChoice {
  /** Around the choice stands another round of holding out: gauge by gauge. This is the error to publish. */
  readonly validation: CrossValidation;
  /** The same, cluster by cluster: what to expect where the next gauge is far. */
  readonly clusterValidation: CrossValidation;
  /** How often each method was picked in the outer folds, gauge by gauge. */
  readonly chosenInFolds: ReadonlyMap<MethodName, number>;
}

/**
 * Where every choice starts. House rule, from tuning storms 1 to 10: some thirty gauges cannot tell methods apart that
 * differ by less than a third, and picking the least error among them all did worse than never picking.
 */
const START: MethodName = "combined";
/** Another leads only where both of its errors are smaller by this share. House rule, from the same storms. */
const LEADS_BY = 1 / 3;
/** Two methods do as well as each other where both errors are within this share, or within rounding. House rules. */
const AS_GOOD_WITHIN = 0.005;
const ROUNDING_MM = 1e-3;
/** Up to so many gauges each is held out alone: among candidates, and around the whole choice. */
const CANDIDATES_ALONE_UP_TO = 60;
const CHOICE_ALONE_UP_TO = 30;

/** The rule in words, for people. */
export const CHOICE_RULE =
  "the mean of Brandes' factors and Bayesian kriging, unless another method meets gauges better by a third, both those held out in turn and those held out with their whole cluster: then the best of these; of methods that do as well, the simplest";

/**
 * Cross-validates one method; verdicts on gauges, variograms, factors and fallbacks are made anew in every fold.
 *
 * @param gauges - all gauges, trusted or not
 * @param trust - which of some gauges are to be trusted
 */
export function validateMethod(
  name: MethodName,
  gauges: readonly WindowGauge[],
  settings: MethodSettings,
  trust: TrustRule = TRUST_ALL,
): { readonly validation: CrossValidation; readonly clusterValidation: CrossValidation } {
  const trials = new Trials(gauges, settings, trust);
  const scored = trials.without([]).trusted;
  const learn = (trial: Trial) => trial.learn(name);
  return {
    validation: crossValidate(trials, scored, foldsOf(scored.length, CANDIDATES_ALONE_UP_TO), learn),
    clusterValidation: crossValidate(trials, scored, clustersOf(scored), learn),
  };
}

/**
 * Cross-validates every method and picks one: {@link CHOICE_RULE}.
 *
 * A method that leaves a judged gauge without a figure is no candidate for the choice, but it is listed.
 *
 * @param gauges - all gauges, trusted or not
 * @param trust - which of some gauges are to be trusted
 */
export function chooseMethod(
  gauges: readonly WindowGauge[],
  settings: MethodSettings,
  trust: TrustRule = TRUST_ALL,
): MethodChoice {
  return chooseWithout([], new Trials(gauges, settings, trust));
}

/** {@link chooseMethod} with the error of the whole procedure: no gauge is judged by a method that it helped to choose. */
export function validateChoice(
  gauges: readonly WindowGauge[],
  settings: MethodSettings,
  trust: TrustRule = TRUST_ALL,
): ValidatedChoice {
  const trials = new Trials(gauges, settings, trust);
  const scored = trials.without([]).trusted;
  const chosenInFolds = new Map<MethodName, number>();
  const outer = (folds: Int32Array, picked: (name: MethodName) => void) =>
    crossValidate(trials, scored, folds, (trial, heldOut) => {
      const { chosen } = chooseWithout(heldOut, trials);
      picked(chosen);
      return trial.learn(chosen);
    });
  return {
    ...chooseWithout([], trials),
    validation: outer(foldsOf(scored.length, CHOICE_ALONE_UP_TO), (name) =>
      chosenInFolds.set(name, (chosenInFolds.get(name) ?? 0) + 1),
    ),
    clusterValidation: outer(clustersOf(scored), () => undefined),
    chosenInFolds,
  };
}

/** The choice that is made when some gauges are not there at all. */
function chooseWithout(absent: readonly WindowGauge[], trials: Trials): MethodChoice {
  const scored = trials.without(absent).trusted;
  const alone = heldOutTogether(scored, foldsOf(scored.length, CANDIDATES_ALONE_UP_TO));
  const clusters = heldOutTogether(scored, clustersOf(scored));
  const candidates = METHOD_NAMES.map((name): Candidate => {
    const one = meet(name, alone, absent, trials);
    const far = meet(name, clusters, absent, trials);
    const withoutFigure = Math.max(one.withoutFigure, far.withoutFigure);
    const known = (mm: number) => (withoutFigure > 0 ? Number.NaN : mm);
    return {
      name,
      errorMm: known(one.errorMm),
      meanErrorMm: known(one.meanErrorMm),
      clusterErrorMm: known(far.errorMm),
      gaugeCount: scored.length - one.withoutFigure,
      notes: countedNotes(one.notes, alone.length, withoutFigure),
    };
  });
  return { chosen: picked(candidates), candidates };
}

/** {@link CHOICE_RULE}. Candidates stand in order, the simpler first. */
function picked(candidates: readonly Candidate[]): MethodName {
  const whole = candidates.filter(({ errorMm, clusterErrorMm }) => Number.isFinite(errorMm + clusterErrorMm));
  const start = whole.find(({ name }) => name === START);
  const lossMm = ({ errorMm, clusterErrorMm }: Candidate) => (errorMm + clusterErrorMm) / 2;
  const leading = whole.filter(
    ({ errorMm, clusterErrorMm }) =>
      start === undefined ||
      (errorMm < (1 - LEADS_BY) * start.errorMm && clusterErrorMm < (1 - LEADS_BY) * start.clusterErrorMm),
  );
  const best = leading.reduce((least, one) => (least && lossMm(least) <= lossMm(one) ? least : one), start);
  if (best === undefined) return "mean-field-bias";
  const isAlike = (mm: number, bestMm: number) =>
    Math.abs(mm - bestMm) <= AS_GOOD_WITHIN * bestMm + ROUNDING_MM;
  const alike = whole.find(
    ({ errorMm, clusterErrorMm }) =>
      isAlike(errorMm, best.errorMm) && isAlike(clusterErrorMm, best.clusterErrorMm),
  );
  return (alike ?? best).name;
}

function heldOutTogether(scored: readonly WindowGauge[], folds: Int32Array): WindowGauge[][] {
  const groups = new Map<number, WindowGauge[]>();
  for (const [i, gauge] of scored.entries()) {
    const group = groups.get(folds[i]);
    if (group === undefined) groups.set(folds[i], [gauge]);
    else group.push(gauge);
  }
  return [...groups.values()];
}

interface Met {
  readonly errorMm: number;
  readonly meanErrorMm: number;
  readonly withoutFigure: number;
  /** In how many trainings each note was made. */
  readonly notes: ReadonlyMap<string, number>;
}

function meet(
  name: MethodName,
  groups: readonly (readonly WindowGauge[])[],
  absent: readonly WindowGauge[],
  trials: Trials,
): Met {
  const notes = new Map<string, number>();
  let [squares, sum, count, withoutFigure] = [0, 0, 0, 0];
  for (const group of groups) {
    const trial = trials.without([...absent, ...group]);
    for (const note of new Set(trial.learn(name).notes)) notes.set(note, (notes.get(note) ?? 0) + 1);
    for (const gauge of group) {
      const error = trial.depthAt(name, gauge) - gauge.gaugeMm;
      if (Number.isNaN(error)) {
        withoutFigure++;
        continue;
      }
      squares += error * error;
      sum += error;
      count++;
    }
  }
  return { errorMm: Math.sqrt(squares / count), meanErrorMm: sum / count, withoutFigure, notes };
}

function countedNotes(notes: Met["notes"], trainings: number, withoutFigure: number): string[] {
  const counted = [...notes].map(([note, count]) => `${note} (${count} of ${trainings} folds)`);
  return withoutFigure > 0 ? [...counted, `no figure at ${withoutFigure} gauges: not chosen`] : counted;
}
