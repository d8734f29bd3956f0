import { type CapSetting, resolveCap } from "../../cap.ts";
import { SNOW_EQUIVALENT_TO_MELTED_DB } from "../../relations.ts";
import type { ZrRelation } from "../../zr-relation.ts";
import type { BandLaws } from "./estimators.ts";

/** One relation made ready: R = exp(perDb dBZ + constant), which is (Z / a)^(1 / b). */
export interface ReadyRelation {
  readonly relation: ZrRelation;
  readonly perDb: number;
  readonly constant: number;
  readonly capDbz: number;
  readonly capMmPerHour: number;
  /** True where the cap was set as a rate, so that nothing made from Z may pass it. */
  readonly capIsRate: boolean;
}

/** Settings made ready for the gates of one radar; small, and the same for every sweep. */
export interface RateTables {
  /** Indexed by the numbers of `RAIN_TYPE`. */
  readonly byType: readonly [ReadyRelation, ReadyRelation, ReadyRelation];
  /** Undefined where no coefficients stand for the wavelength, it is not known, or a relation is for snow. */
  readonly laws: BandLaws | undefined;
  readonly zZdrShare: number;
  readonly kdpZdrPart: number;
  /** Taken off every ZDR. */
  readonly zdrOffsetDb: number;
  /** Rain by KDP over rain by Z under `relation`, as the run has learned it; undefined where it has not. */
  readonly dropNumberRatio: number | undefined;
  /** Factor on every R(Z) for the size of drops, as the run has learned it; 1 where it has not. See `dropSizeRatio`. */
  readonly dropSizeFactor: number;
  /** The same on R(KDP), see `kdpFactorOf`. */
  readonly kdpFactor: number;
}

/** @throws RangeError as `resolveCap` */
export function readyRelation(relation: ZrRelation, cap: CapSetting): ReadyRelation {
  const resolved = resolveCap(cap, relation);
  const perDb = Math.LN10 / (10 * relation.b);
  const meltedDb = relation.phase === "snow" ? SNOW_EQUIVALENT_TO_MELTED_DB : 0;
  return {
    relation,
    perDb,
    constant: perDb * meltedDb - Math.log(relation.a) / relation.b,
    capDbz: resolved.dbz,
    capMmPerHour: resolved.mmPerHour,
    capIsRate: resolved.given === "mmPerHour",
  };
}

/** Rain rate of a reflectivity before the cap: `rainRateMmPerHour` with one exponential in place of two powers. */
export function rateOfZ(reflectivityDbz: number, { perDb, constant }: ReadyRelation): number {
  return Math.exp(perDb * reflectivityDbz + constant);
}
