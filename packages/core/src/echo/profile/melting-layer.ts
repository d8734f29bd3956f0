import type { PolarEcho } from "../polar-echo.ts";
import { type CorrelationMean, CorrelationSums } from "./correlation-sums.ts";
import { type EchoRatio, EchoRatios } from "./echo-ratios.ts";
import type { BeamSettings } from "./gate-table.ts";
import {
  type CorrelationFit,
  correlationWithoutLayer,
  fitCorrelation,
  seesLayer,
} from "./layer-correlation.ts";
import {
  excessTold,
  heightsOf,
  leastNear,
  type ProfileNumbers,
  profileOf,
  ratioMisfit,
} from "./layer-fit.ts";
import type { MeltingLayer } from "./learned-profile.ts";
import { layerShares, USUAL_PROFILE } from "./vertical-profile.ts";

/** Middles of the layer that are tried first, above mean sea level. */
const HIGHEST_MIDDLE_M = 6000;
const STEP_M = 100;
/** Excesses that are tried first. */
const EXCESSES_DB = [3, 6, 9];
/** What a search may come to. */
export const PROFILE_LIMITS = [
  [-500, 7000],
  [200, 1000],
  [0, 12],
  [-9, 0],
] as const;
export const PROFILE_STEPS: ProfileNumbers = [50, 100, 1, 0.5];
/** Chi-square by which the layer must explain more than no layer: five standard deviations. */
const EVIDENCE = 25;
/** RHOHV must fall by so much, else it is scatter; melting snow makes 0.03 to 0.15 (common practice). */
const LEAST_DROP = 0.02;
/** Without RHOHV the layer must show as a peak of so much. */
const LEAST_PEAK_DB = 2;
/** Points that must be there to tell the layer from the rain below. */
const ENOUGH_POINTS = 8;
/**
 * A height is not known better than this, nor than this share of the distance and spread of the beam that comes
 * closest to the layer, whatever the fit says: house rules.
 */
const LEAST_UNCERTAINTY_M = 50;
const BEAM_SHARE = 0.25;

/**
 * Learns the height of the melting layer from scans: where RHOHV is least and Z greatest by height, both as a beam of
 * the given width would see a layer. For the signature in RHOHV see Giangrande, Krause and Ryzhkov (2008), J. Appl.
 * Meteorol. Climatol. 47, 1354-1364; the fit of layers smeared by the beam is a house rule.
 */
export class MeltingLayerLearner {
  readonly #ratios: EchoRatios;
  readonly #correlation: CorrelationSums;

  constructor(settings: BeamSettings = {}) {
    this.#ratios = new EchoRatios(settings);
    this.#correlation = new CorrelationSums(settings);
  }

  /**
   * Takes in a sweep, screened and freed of attenuation as far as that was possible; round by round.
   *
   * @param rainType - by gate, see `RAIN_TYPE`: convective gates are left out
   */
  add(echo: PolarEcho, rainType?: Uint8Array): void {
    this.#ratios.add(echo, rainType);
    this.#correlation.add(echo, rainType);
  }

  /** @returns undefined where no layer is within reach, or the scans do not tell */
  finish(): MeltingLayer | undefined {
    return findLayer(this.#ratios.ratios(), this.#correlation.means());
  }
}

/**
 * The layer below a level of 0 °C that is known otherwise: as thick as is usual, its top at that level.
 *
 * @param freezingHeightAslM - above mean sea level
 */
export function layerBelowFreezing(freezingHeightAslM: number): MeltingLayer {
  const { value, spread } = USUAL_PROFILE.thicknessM;
  return {
    bottomM: freezingHeightAslM - value,
    topM: freezingHeightAslM,
    basis: "plan",
    uncertaintyM: spread,
  };
}

/** The layer that explains ratios of echo and means of RHOHV, if it explains them much better than none does. */
export function findLayer(
  ratios: readonly EchoRatio[],
  means: readonly CorrelationMean[],
): MeltingLayer | undefined {
  const evidence = new LayerEvidence(
    ratios.length >= ENOUGH_POINTS ? ratios : [],
    means.length >= ENOUGH_POINTS ? means : [],
  );
  const { at, least } = leastNear(evidence.best(), PROFILE_STEPS, PROFILE_LIMITS, (numbers) =>
    evidence.misfit(numbers),
  );
  if (evidence.withoutLayer - least < EVIDENCE) return undefined;
  const correlation = evidence.tellingCorrelation(at);
  if (correlation === undefined && !echoAloneTells(ratios, at)) return undefined;
  return {
    ...heightsOf(at),
    basis: "scans",
    uncertaintyM: evidence.uncertaintyM(at, least),
    correlation: correlation && { inRain: correlation.inRain, drop: correlation.drop },
  };
}

/** Without RHOHV the peak itself must be told, with beams both in the rain below and in the layer. */
function echoAloneTells(ratios: readonly EchoRatio[], numbers: ProfileNumbers): boolean {
  const [, , peakDb] = numbers;
  const { told, agree } = excessTold(ratios, profileOf(numbers));
  const shares = ratios.map(({ aloftM, aloftSigmaM }) =>
    layerShares(heightsOf(numbers), aloftM, aloftSigmaM),
  );
  return peakDb >= LEAST_PEAK_DB && told && agree && seesLayer(shares);
}

/** How well layers explain what was collected; both kinds of evidence are scaled to what their best fit leaves. */
class LayerEvidence {
  readonly #ratios: readonly EchoRatio[];
  readonly #means: readonly CorrelationMean[];
  readonly #correlationNone: number;
  #ratioScale = 1;
  #correlationScale = 1;
  #withoutPeak = 0;

  constructor(ratios: readonly EchoRatio[], means: readonly CorrelationMean[]) {
    this.#ratios = ratios;
    this.#means = means;
    this.#correlationNone = correlationWithoutLayer(means);
  }

  /** Misfit where there is no layer: RHOHV level, and echo level or falling from some height on. */
  get withoutLayer(): number {
    return this.#withoutPeak / this.#ratioScale + this.#correlationNone / this.#correlationScale;
  }

  /** The first guess, on a coarse ladder of heights; sets the scales by it. */
  best(): ProfileNumbers {
    const thicknessM = USUAL_PROFILE.thicknessM.value;
    const slope = USUAL_PROFILE.slopeAboveDbPerKm.value;
    const rungs: { numbers: ProfileNumbers; echo: number; correlation: number }[] = [];
    this.#withoutPeak = ratioMisfit(this.#ratios, undefined);
    for (let middleM = 0; middleM <= HIGHEST_MIDDLE_M; middleM += STEP_M) {
      const level: ProfileNumbers = [middleM, thicknessM, 0, slope];
      this.#withoutPeak = Math.min(this.#withoutPeak, ratioMisfit(this.#ratios, profileOf(level)));
      const correlation = this.correlation(level)?.chi2 ?? this.#correlationNone;
      for (const peakDb of EXCESSES_DB) {
        const numbers: ProfileNumbers = [middleM, thicknessM, peakDb, slope];
        rungs.push({ numbers, echo: ratioMisfit(this.#ratios, profileOf(numbers)), correlation });
      }
    }
    const scale = (of: "echo" | "correlation", points: number) =>
      Math.max(1, Math.min(...rungs.map((rung) => rung[of])) / Math.max(1, points - 4));
    this.#ratioScale = scale("echo", this.#ratios.length);
    this.#correlationScale = scale("correlation", this.#means.length);
    const total = ({ echo, correlation }: { echo: number; correlation: number }) =>
      echo / this.#ratioScale + correlation / this.#correlationScale;
    return rungs.reduce((a, b) => (total(b) < total(a) ? b : a)).numbers;
  }

  misfit(numbers: ProfileNumbers): number {
    const [, thicknessM, peakDb, slope] = numbers;
    const usual = USUAL_PROFILE;
    return (
      ratioMisfit(this.#ratios, profileOf(numbers)) / this.#ratioScale +
      (this.correlation(numbers)?.chi2 ?? this.#correlationNone) / this.#correlationScale +
      ((thicknessM - usual.thicknessM.value) / usual.thicknessM.spread) ** 2 +
      ((peakDb - usual.peakDb.value) / usual.peakDb.spread) ** 2 +
      ((slope - usual.slopeAboveDbPerKm.value) / usual.slopeAboveDbPerKm.spread) ** 2
    );
  }

  correlation(numbers: ProfileNumbers): CorrelationFit | undefined {
    const fit = fitCorrelation(this.#means, heightsOf(numbers));
    return fit !== undefined && fit.drop >= LEAST_DROP ? fit : undefined;
  }

  /** RHOHV where it alone is evidence enough. */
  tellingCorrelation(numbers: ProfileNumbers): CorrelationFit | undefined {
    const fit = this.correlation(numbers);
    if (fit === undefined) return undefined;
    return (this.#correlationNone - fit.chi2) / this.#correlationScale >= EVIDENCE ? fit : undefined;
  }

  /** Half the way in height between the places where the misfit has grown by one, and what beams can tell at best. */
  uncertaintyM([middleM, ...rest]: ProfileNumbers, least: number): number {
    let wide = 0;
    for (const sign of [1, -1]) {
      let away = 0;
      while (away < 1000) {
        away += 10;
        if (this.misfit([middleM + sign * away, ...rest] as ProfileNumbers) > least + 1) break;
      }
      wide += away / 2;
    }
    const beams = [
      ...this.#ratios.map(({ aloftM, aloftSigmaM }) => Math.hypot(aloftM - middleM, aloftSigmaM)),
      ...this.#means.map(({ centreM, sigmaM }) => Math.hypot(centreM - middleM, sigmaM)),
    ];
    return Math.max(LEAST_UNCERTAINTY_M, wide, BEAM_SHARE * Math.min(...beams));
  }
}
