import type { LossEstimate } from "./loss-coefficient-learner.ts";
import { type PhaseCoefficient, phaseCoefficients } from "./phase-coefficients.ts";

/** What is known of one radar's loss per degree before it is settled. */
export interface LossEvidence {
  readonly wavelengthM: number;
  /** Each of its own: from this radar alone, from a neighbour that sees the same rain. May be empty. */
  readonly estimates: readonly LossEstimate[];
}

/** The loss per degree that a radar's echo is corrected with. */
export interface SettledLoss {
  /** Mean over what may be: 0 where the echo was corrected before, else the published value drawn to the evidence. */
  readonly alphaDbPerDeg: number;
  /** How likely it is that the sender has corrected the echo already, 0 to 1. */
  readonly correctedBefore: number;
}

/** Beforehand: senders seldom correct attenuation, and mostly do alike for all of their radars. House rule. */
const ALL_CORRECTED = 0.15;
const NONE_CORRECTED = 0.8;
const EACH_FOR_ITSELF = 1 - ALL_CORRECTED - NONE_CORRECTED;
const ONE_CORRECTED = ALL_CORRECTED / (ALL_CORRECTED + NONE_CORRECTED);
/** More likely than this counts as certain: a trace of correction serves nobody. */
const CERTAIN = 0.95;
/** Standard deviations between the ends of a range that holds nine tenths. */
const NINE_TENTHS = 3.29;

/**
 * Settles the loss per degree of a run's radars together, by Bayes' rule from the published spread and the
 * evidence: an echo that the sender has corrected shows none, any other one within what is published.
 *
 * A radar without evidence keeps the published value, less the chance that its sender corrects.
 *
 * @returns in the order given; undefined for a band without a published value
 */
export function settleLossCoefficients(
  radars: readonly LossEvidence[],
): readonly (SettledLoss | undefined)[] {
  const known = radars.map(({ wavelengthM, estimates }) => {
    const published = phaseCoefficients(wavelengthM)?.loss;
    return published === undefined ? undefined : weigh(published, estimates);
  });
  let all = ALL_CORRECTED;
  let none = NONE_CORRECTED;
  let each = EACH_FOR_ITSELF;
  for (const radar of known) {
    if (radar === undefined) continue;
    all *= radar.ifCorrected;
    none *= radar.ifNot;
    each *= ONE_CORRECTED * radar.ifCorrected + (1 - ONE_CORRECTED) * radar.ifNot;
  }
  return known.map((radar) => {
    if (radar === undefined) return undefined;
    const own = ONE_CORRECTED * radar.ifCorrected;
    const ofItself = own / (own + (1 - ONE_CORRECTED) * radar.ifNot);
    const correctedBefore = (all + each * ofItself) / (all + none + each);
    return {
      alphaDbPerDeg: correctedBefore > CERTAIN ? 0 : (1 - correctedBefore) * radar.alphaIfNot,
      correctedBefore,
    };
  });
}

/** Likelihood of the evidence either way, scaled alike, and the loss per degree if there is one. */
function weigh(published: PhaseCoefficient, estimates: readonly LossEstimate[]) {
  const spread = (published.highDbPerDeg - published.lowDbPerDeg) / NINE_TENTHS;
  let precision = 0;
  let weighted = 0;
  for (const { alphaDbPerDeg, standardErrorDbPerDeg } of estimates) {
    precision += standardErrorDbPerDeg ** -2;
    weighted += alphaDbPerDeg * standardErrorDbPerDeg ** -2;
  }
  if (precision === 0) return { ifCorrected: 1, ifNot: 1, alphaIfNot: published.dbPerDeg };
  const alpha = weighted / precision;
  // Estimates that contradict each other have larger errors than they say: Birge (1932), Phys. Rev. 40, 207-227.
  let chiSquare = 0;
  for (const { alphaDbPerDeg, standardErrorDbPerDeg } of estimates) {
    chiSquare += ((alphaDbPerDeg - alpha) / standardErrorDbPerDeg) ** 2;
  }
  const variance = Math.max(1, chiSquare / Math.max(1, estimates.length - 1)) / precision;
  const both = variance + spread * spread;
  const before = spread ** -2;
  return {
    // The greater exponent is taken out of both, so that no evidence underflows.
    ...likelihoods(alpha, published.dbPerDeg, variance, both),
    alphaIfNot: Math.max(
      published.lowDbPerDeg / 2,
      (published.dbPerDeg * before + alpha / variance) / (before + 1 / variance),
    ),
  };
}

function likelihoods(alpha: number, expected: number, variance: number, both: number) {
  const corrected = (-0.5 * alpha * alpha) / variance - 0.5 * Math.log(variance);
  const not = (-0.5 * (alpha - expected) ** 2) / both - 0.5 * Math.log(both);
  const most = Math.max(corrected, not);
  return { ifCorrected: Math.exp(corrected - most), ifNot: Math.exp(not - most) };
}
