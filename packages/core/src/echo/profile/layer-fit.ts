import type { EchoRatio } from "./echo-ratios.ts";
import {
  beamProfileDb,
  idealisedProfile,
  type LayerHeights,
  type VerticalProfile,
} from "./vertical-profile.ts";

/** What a profile is fitted by: the peak stays in the middle of the layer, for no beam tells otherwise. */
export type ProfileNumbers = readonly [
  middleM: number,
  thicknessM: number,
  peakDb: number,
  slopeAboveDbPerKm: number,
];

export function profileOf(numbers: ProfileNumbers): VerticalProfile {
  const [, , peakDb, slopeAboveDbPerKm] = numbers;
  return { ...idealisedProfile(heightsOf(numbers)), peakDb, slopeAboveDbPerKm };
}

export function heightsOf([middleM, thicknessM]: ProfileNumbers): LayerHeights {
  return { bottomM: middleM - thicknessM / 2, topM: middleM + thicknessM / 2 };
}

/** Error of a mean ratio that no number of rounds takes away: rain changes with height for other reasons too. House rule. */
const LEAST_ERROR_DB = 0.4;
/** From this many errors on, a misfit counts by its size and not by its square (Huber 1964, Ann. Math. Stat. 35, 73-101). */
const OUTLYING = 2;

/** What the beams of a ratio make of a profile, dB. */
export function modelledRatioDb(ratio: EchoRatio, profile: VerticalProfile): number {
  return (
    beamProfileDb(profile, ratio.aloftM, ratio.aloftSigmaM) -
    beamProfileDb(profile, ratio.lowestM, ratio.lowestSigmaM)
  );
}

/** Chi-square of ratios under a profile, without a profile where it is undefined. */
export function ratioMisfit(ratios: readonly EchoRatio[], profile: VerticalProfile | undefined): number {
  let sum = 0;
  for (const ratio of ratios) {
    sum += outlierSafe(ratio, profile === undefined ? 0 : modelledRatioDb(ratio, profile));
  }
  return sum;
}

/** What a ratio adds to the chi-square of a model. */
export function outlierSafe({ ratioDb, errorDb }: EchoRatio, modelDb: number): number {
  const errors = Math.abs(ratioDb - modelDb) / Math.hypot(errorDb, LEAST_ERROR_DB);
  return errors < OUTLYING ? errors * errors : OUTLYING * (2 * errors - OUTLYING);
}

/** Search stops when its steps have been halved so often. */
const HALVINGS = 6;

/**
 * The least of a function by steps along each number in turn, halved when none leads down. Deterministic, and content
 * with corners; where two numbers trade against each other it is slow, but close enough.
 *
 * @param steps - first step of each number
 * @param limits - lowest and highest of each number
 */
export function leastNear(
  start: ProfileNumbers,
  steps: ProfileNumbers,
  limits: readonly (readonly [number, number])[],
  of: (numbers: ProfileNumbers) => number,
): { readonly at: ProfileNumbers; readonly least: number } {
  let at = [...start] as [number, number, number, number];
  let least = of(at);
  let scale = 1;
  for (let halving = 0; halving <= HALVINGS; ) {
    let moved = false;
    for (let i = 0; i < at.length; i++) {
      for (const sign of [1, -1]) {
        const next = [...at] as [number, number, number, number];
        const [low, high] = limits[i] as readonly [number, number];
        next[i] = Math.min(high, Math.max(low, (at[i] as number) + sign * scale * (steps[i] as number)));
        const value = of(next);
        if (!(value < least)) continue;
        [at, least, moved] = [next, value, true];
        break;
      }
    }
    if (moved) continue;
    scale /= 2;
    halving++;
  }
  return { at, least };
}
