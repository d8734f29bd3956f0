import type { CapSetting } from "../../cap.ts";
import type { ZrRelation } from "../../zr-relation.ts";
import { RAIN_TYPE } from "../rain-type/steiner.ts";
import { type LearnedDropNumber, learnedDropNumberRatio } from "./drop-number.ts";
import { dropSizeRatio, kdpFactorOf, type LearnedDropSize } from "./drop-size.ts";
import { bandLaws } from "./estimators.ts";
import { type RateTables, type ReadyRelation, readyRelation } from "./ready-relation.ts";

/** What polarimetric moments may do to the rate. A share of 0 leaves an estimator out. */
export interface PolarimetricRateSettings {
  /** Lets the relation follow the number of drops that KDP tells, see `dropNumberFactor`. */
  readonly dropNumber: boolean;
  /** Lets the relation follow the size of drops that ZDR tells over the run, see `dropSizeRatio`. */
  readonly dropSize: boolean;
  /** Marks hail and takes it out of the rain. */
  readonly hail: boolean;
  /** Share of R(KDP) in heavy rain, 0 to 1, where it is well measured. */
  readonly kdpShare: number;
  /** Part of R(KDP) that R(KDP, ZDR) takes over where ZDR is measured; undefined takes what the band usually has. */
  readonly kdpZdrPart?: number | undefined;
  /** Share of R(Z, ZDR) in moderate rain; undefined takes what the band usually has. */
  readonly zZdrShare?: number | undefined;
  /** Share of R(A) in moderate and heavy rain, where a specific attenuation is given. */
  readonly attenuationShare: number;
}

/** How the echo of one radar becomes rain. */
export interface GateRateSettings {
  readonly relation: ZrRelation;
  /** Instead of `relation` in convective and in stratiform rain. */
  readonly convective?: ZrRelation | undefined;
  readonly stratiform?: ZrRelation | undefined;
  readonly cap: CapSetting;
  /** Rates below it count as dry, mm/h; 0 or more. */
  readonly minRateMmPerHour: number;
  /** Undefined where polarimetric moments are to have no part. */
  readonly polarimetric?: PolarimetricRateSettings | undefined;
}

/**
 * House rule, from what helps in storms with known rain: R(KDP) in the heaviest rain and under hail, the number
 * of drops over whole sweeps, their size over the run, R(Z, ZDR) and R(KDP, ZDR) at S band. R(A) is there to be asked for.
 */
export const POLARIMETRIC_RATE_DEFAULTS: PolarimetricRateSettings = {
  dropNumber: true,
  dropSize: true,
  hail: true,
  kdpShare: 1,
  attenuationShare: 0,
};

/** What a run has learned of a radar that its rates depend on. */
export interface LearnedRates {
  /** How much too high the radar's ZDR is; 0 where nothing is known. */
  readonly zdrOffsetDb: number;
  readonly dropNumber?: LearnedDropNumber | undefined;
  /** Of all radars that tell of it: the size of drops is the rain's. */
  readonly dropSize?: LearnedDropSize | undefined;
}

/**
 * Makes settings ready.
 *
 * @param wavelengthM - of the radar; undefined leaves every polarimetric rate out
 * @throws RangeError as `resolveCap`, and where the cut-off, a share or the offset is none
 */
export function rateTables(
  settings: GateRateSettings,
  wavelengthM: number | undefined,
  { zdrOffsetDb, dropNumber, dropSize }: LearnedRates = { zdrOffsetDb: 0 },
): RateTables {
  const {
    relation,
    convective = relation,
    stratiform = relation,
    cap,
    minRateMmPerHour,
    polarimetric,
  } = settings;
  if (!(minRateMmPerHour >= 0 && Number.isFinite(minRateMmPerHour) && Number.isFinite(zdrOffsetDb))) {
    throw new RangeError(
      `a rate needs a finite cut-off of 0 or more and a finite ZDR offset, got ${minRateMmPerHour} mm/h, ${zdrOffsetDb} dB`,
    );
  }
  const { kdpShare = 0, kdpZdrPart, zZdrShare, attenuationShare = 0 } = polarimetric ?? {};
  for (const share of [kdpShare, kdpZdrPart ?? 0, zZdrShare ?? 0, attenuationShare]) {
    if (!(share >= 0 && share <= 1)) throw new RangeError(`a share lies between 0 and 1, got ${share}`);
  }
  const ready = readyRelation(relation, cap);
  const byType: [ReadyRelation, ReadyRelation, ReadyRelation] = [ready, ready, ready];
  byType[RAIN_TYPE.convective] = readyRelation(convective, cap);
  byType[RAIN_TYPE.stratiform] = readyRelation(stratiform, cap);
  // Where snow is said to fall, no law of rain has a say.
  const isForSnow = byType.some((one) => one.relation.phase === "snow");
  const laws = wavelengthM === undefined || isForSnow ? undefined : bandLaws(wavelengthM);
  const follows = polarimetric?.dropSize === true && laws !== undefined && dropSize !== undefined;
  const dropSizeFactor = follows ? (dropSizeRatio(dropSize, ready)?.factor ?? 1) : 1;
  return {
    byType,
    laws,
    zZdrShare: zZdrShare ?? laws?.usualZdrShare ?? 0,
    kdpZdrPart: kdpZdrPart ?? laws?.usualZdrShare ?? 0,
    zdrOffsetDb,
    dropNumberRatio: dropNumber === undefined ? undefined : learnedDropNumberRatio(dropNumber, ready),
    dropSizeFactor,
    kdpFactor: laws === undefined ? 1 : kdpFactorOf(dropSizeFactor, relation.b, laws.kdp.exponent),
  };
}
