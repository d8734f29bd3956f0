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
/** Scatter of a single cell; rain drifts from one to the next between two sweeps. House rule. */
const CELL_ERROR_DB = 3;
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
export function outlierSafe({ ratioDb, errorDb, cells }: EchoRatio, modelDb: number): number {
  const errorOfAllDb = Math.hypot(errorDb, LEAST_ERROR_DB, CELL_ERROR_DB / Math.sqrt(cells));
  const errors = Math.abs(ratioDb - modelDb) / errorOfAllDb;
  return errors < OUTLYING ? errors * errors : OUTLYING * (2 * errors - OUTLYING);
}

/** An excess that is wrong by this much must be told at two standard deviations, else it was not measured. */
const TOLD_APART_DB = 2;
const TOLD_APART_CHI2 = 4;
/** Ratios that scatter more than this about the fit (root mean square) do not come from one profile; house rule. */
const MOST_MISFIT_DB = 1.5;

/** How well ratios tell the excess of a melting layer that was fitted to them. */
export interface ExcessTold {
  readonly told: boolean;
  /** Root mean square of what the fit leaves unexplained. */
  readonly misfitDb: number;
  /** Whether the ratios may come from one profile. */
  readonly agree: boolean;
}

export function excessTold(ratios: readonly EchoRatio[], profile: VerticalProfile): ExcessTold {
  const least = ratioMisfit(ratios, profile);
  const scale = Math.max(1, least / Math.max(1, ratios.length - 4));
  const told = [TOLD_APART_DB, -TOLD_APART_DB].every(
    (db) =>
      ratioMisfit(ratios, { ...profile, peakDb: profile.peakDb + db }) - least >= TOLD_APART_CHI2 * scale,
  );
  const misfitDb = Math.sqrt(
    ratios.reduce((sum, ratio) => sum + (ratio.ratioDb - modelledRatioDb(ratio, profile)) ** 2, 0) /
      ratios.length,
  );
  return { told, misfitDb, agree: misfitDb <= MOST_MISFIT_DB };
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
