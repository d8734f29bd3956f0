import { decibels, ratioFromDecibels } from "../../units.ts";
import type { PolarEcho } from "../polar-echo.ts";
import { type EchoRatio, EchoRatios } from "./echo-ratios.ts";
import type { BeamSettings } from "./gate-table.ts";
import {
  excessTold,
  leastNear,
  outlierSafe,
  type ProfileNumbers,
  profileOf,
  ratioMisfit,
} from "./layer-fit.ts";
import type { LearnedProfile, MeltingLayer } from "./learned-profile.ts";
import { PROFILE_LIMITS, PROFILE_STEPS } from "./melting-layer.ts";
import { beamProfileDb, idealisedProfile, USUAL_PROFILE, type VerticalProfile } from "./vertical-profile.ts";

/** Snow that is farther above the layer than this may fall off otherwise; house rule. */
const SNOW_DEPTH_M = 3000;
/** Ratios that a fit needs. */
const ENOUGH_RATIOS = 8;
/**
 * Learns the mean apparent profile of a run and fits a {@link VerticalProfile} to it, seen through the beams it was
 * measured with: least squares on ratios of linear Z, held near common practice by the usual spread of each number.
 * After Kitchen, Brown and Davies (1994), Q. J. R. Meteorol. Soc. 120, 1231-1254, and Joss and Lee (1995), J. Appl.
 * Meteorol. 34, 2612-2630.
 */
export class ProfileLearner {
  readonly #ratios: EchoRatios;

  constructor(settings: BeamSettings = {}) {
    this.#ratios = new EchoRatios(settings);
  }

  /** As `MeltingLayerLearner.add`: sweeps round by round. */
  add(echo: PolarEcho, rainType?: Uint8Array): void {
    this.#ratios.add(echo, rainType);
  }

  /** @param layer - from the scans or the plan; undefined means that nothing will be corrected */
  finish(layer: MeltingLayer | undefined): LearnedProfile {
    const learned = fitProfile(this.#ratios.ratios(), layer);
    if (learned.basis !== "measured" || learned.profile === undefined) return learned;
    return { ...learned, convectiveShare: shareInShowers(this.#ratios.ratios("showers"), learned.profile) };
  }
}

/** A profile about a known layer; see {@link ProfileLearner}. */
export function fitProfile(all: readonly EchoRatio[], layer: MeltingLayer | undefined): LearnedProfile {
  if (layer === undefined) {
    return {
      basis: "none",
      reason: "no melting layer was found within reach",
      pairCount: 0,
      misfitDb: Number.NaN,
    };
  }
  const idealised = (reason: string, pairCount = 0): LearnedProfile => ({
    basis: "idealised",
    reason,
    layer,
    profile: idealisedProfile(layer),
    pairCount,
    misfitDb: Number.NaN,
  });
  if (layer.basis === "plan") return idealised("the freezing height is the plan's");
  const ratios = all.filter(({ aloftM }) => aloftM < layer.topM + SNOW_DEPTH_M);
  if (ratios.length < ENOUGH_RATIOS) return idealised("too few sweeps see the same rain", ratios.length);

  const usual = USUAL_PROFILE;
  const middleM = (layer.bottomM + layer.topM) / 2;
  const start: ProfileNumbers = [
    middleM,
    layer.topM - layer.bottomM,
    usual.peakDb.value,
    usual.slopeAboveDbPerKm.value,
  ];
  const { at } = leastNear(
    start,
    PROFILE_STEPS,
    PROFILE_LIMITS,
    (numbers) =>
      ratioMisfit(ratios, profileOf(numbers)) +
      ((numbers[0] - middleM) / layer.uncertaintyM) ** 2 +
      ((numbers[1] - start[1]) / usual.thicknessM.spread) ** 2 +
      ((numbers[2] - usual.peakDb.value) / usual.peakDb.spread) ** 2 +
      ((numbers[3] - usual.slopeAboveDbPerKm.value) / usual.slopeAboveDbPerKm.spread) ** 2,
  );
  const profile = profileOf(at);
  const { told, agree, misfitDb } = excessTold(ratios, profile);
  if (!told) return idealised("the sweeps do not tell the excess of the melting layer", ratios.length);
  if (!agree) return idealised("the sweeps do not agree on one profile", ratios.length);
  return {
    basis: "measured",
    reason: "fitted to the sweeps of the run",
    layer,
    profile,
    pairCount: ratios.length,
    misfitDb,
  };
}

/** Steps in which the share of showers that follow the profile is tried. */
const SHARE_STEPS = 20;
/** A pair of beams tells the share where the profile makes so much difference between them. */
const TELLING_DB = 1;

/**
 * How much of the rain in cells of showers has the profile of widespread rain, the rest being level: least squares on
 * a mixture of the two. A rain type told from echo takes strong widespread rain for showers; how often, the volume says.
 */
function shareInShowers(all: readonly EchoRatio[], profile: VerticalProfile): number | undefined {
  const telling = all
    .filter(({ aloftM }) => aloftM < profile.topM + SNOW_DEPTH_M)
    .map((ratio) => ({
      ratio,
      aloft: ratioFromDecibels(beamProfileDb(profile, ratio.aloftM, ratio.aloftSigmaM)),
      lowest: ratioFromDecibels(beamProfileDb(profile, ratio.lowestM, ratio.lowestSigmaM)),
    }))
    .filter(({ aloft, lowest }) => Math.abs(decibels(aloft / lowest)) > TELLING_DB);
  if (telling.length < ENOUGH_RATIOS) return undefined;
  let best = 0;
  let least = Number.POSITIVE_INFINITY;
  for (let step = 0; step <= SHARE_STEPS; step++) {
    const share = step / SHARE_STEPS;
    const misfit = telling.reduce(
      (sum, { ratio, aloft, lowest }) =>
        sum + outlierSafe(ratio, decibels((1 + share * (aloft - 1)) / (1 + share * (lowest - 1)))),
      0,
    );
    if (misfit < least) [best, least] = [share, misfit];
  }
  return best;
}
