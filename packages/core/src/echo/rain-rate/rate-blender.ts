import { CUSTOMARY_CAP_MM_PER_HOUR } from "../../cap.ts";
import type { PolarEcho } from "../polar-echo.ts";
import { RAIN_TYPE } from "../rain-type/steiner.ts";
import { type ComparedGates, comparedGates, dropNumberFactor } from "./drop-number.ts";
import { Z_ZDR_CORRELATION, Z_ZDR_FROM_ZDR_DB } from "./drop-size.ts";
import { rateOfAttenuation, rateOfKdp, rateOfKdpZdr, rateOfZZdr } from "./estimators.ts";
import { hailShare, mayBeHail } from "./hail.ts";
import { isLiquid, MomentReader } from "./moment-reader.ts";
import { ramp } from "./ramp.ts";
import type { GateRateSettings } from "./rate-tables.ts";
import { type RateTables, type ReadyRelation, rateOfZ } from "./ready-relation.ts";

/**
 * One rate on its way: what each estimator says, NaN where it was not asked, and the share that it has. Filled anew
 * for each gate.
 */
export interface RateParts {
  zRate: number;
  zCapped: boolean;
  /** Mean of the gate and those around it; NaN where it was not asked for. */
  kdpDegPerKm: number;
  kdpRate: number;
  kdpShare: number;
  /** As `kdpDegPerKm`, offset taken off. */
  zdrDb: number;
  zZdrRate: number;
  zZdrShare: number;
  attenuationRate: number;
  attenuationShare: number;
  hailShare: number;
  /** Without hail. */
  rainRate: number;
}

/**
 * Where the estimators meet, dBZ, deg/km and dB/km: between the two numbers the share of one rises and of the other
 * falls. R(KDP) comes in where R(Z) nears the hail cap, above the 38 dBZ and 0.3 deg/km of Cifelli et al. (2011).
 * House rule.
 */
const KDP_DBZ = { from: 45, to: 53 } as const;
const KDP_DEG_PER_KM = { from: 0.2, to: 0.5 } as const;
const Z_ZDR_DBZ = { from: 28, full: 35, fading: 45, to: 53 } as const;
const ATTENUATION_DBZ = { from: 25, to: 35 } as const;
/** Drop number's factor beyond which R(Z, ZDR), made for the usual number, is out. */
const Z_ZDR_MOST_FACTOR = 1.5;
/** RHOHV of rain alone. */
const RAIN_CORRELATION = { from: 0.95, to: 0.98 } as const;

/** A polarimetric rate passes the hail cap, but not this; there is no customary limit above it. */
function mostPolarimetric({ capMmPerHour }: ReadyRelation): number {
  return Math.max(capMmPerHour, CUSTOMARY_CAP_MM_PER_HOUR.high);
}

/** Works out one gate after the other into {@link parts}. */
export class RateBlender {
  /** On top of the factor for the size of drops. */
  readonly dropNumberFactor: number;
  /** Whether hail can be told at all. */
  readonly seesHail: boolean;
  /** What another relation's blender of the same sweep can take over. */
  readonly compared: ComparedGates | undefined;
  readonly parts: RateParts = {
    zRate: 0,
    zCapped: false,
    kdpDegPerKm: Number.NaN,
    kdpRate: Number.NaN,
    kdpShare: 0,
    zdrDb: Number.NaN,
    zZdrRate: Number.NaN,
    zZdrShare: 0,
    attenuationRate: Number.NaN,
    attenuationShare: 0,
    hailShare: 0,
    rainRate: 0,
  };
  readonly #echo: PolarEcho;
  readonly #rainType: Uint8Array | undefined;
  readonly #settings: GateRateSettings;
  readonly #tables: RateTables;
  readonly #attenuation: Float32Array | undefined;
  readonly #reader: MomentReader;
  readonly #zZdrShare: number;
  /** Echo below it has no polarimetric part. */
  readonly #plainBelowDbz: number;

  constructor(
    echo: PolarEcho,
    rainType: Uint8Array | undefined,
    settings: GateRateSettings,
    tables: RateTables,
    attenuation: Float32Array | undefined,
    compared?: ComparedGates,
  ) {
    this.#echo = echo;
    this.#rainType = rainType;
    this.#settings = settings;
    this.#tables = tables;
    this.#attenuation = attenuation;
    this.#reader = new MomentReader(echo, tables.zdrOffsetDb);
    const { polarimetric } = settings;
    this.seesHail = polarimetric?.hail === true && echo.zdrDb !== undefined;
    this.#plainBelowDbz =
      polarimetric === undefined || tables.laws === undefined
        ? Number.POSITIVE_INFINITY
        : Math.min(27, Z_ZDR_DBZ.from, ATTENUATION_DBZ.from);
    const followsNumber = polarimetric?.dropNumber === true && tables.laws !== undefined;
    this.compared = followsNumber
      ? (compared ?? comparedGates(echo, this.#reader, tables.laws.kdp))
      : undefined;
    const byNumber = dropNumberFactor(echo, rainType, tables, this.compared);
    // Many drops are small drops: what their size has raised already is not raised again.
    this.dropNumberFactor = Math.max(1, byNumber / Math.max(1, tables.dropSizeFactor));
    const unusual = ramp(byNumber, 1, Z_ZDR_MOST_FACTOR);
    this.#zZdrShare = polarimetric === undefined ? 0 : (1 - unusual) * tables.zZdrShare;
  }

  /** @param gate - one with echo */
  blend(gate: number): void {
    const { parts } = this;
    const dbz = this.#echo.dbz[gate];
    const ready = this.#readyOf(gate);
    const factor = this.#tables.dropSizeFactor * this.dropNumberFactor;
    let zRate = (dbz >= ready.capDbz ? ready.capMmPerHour : rateOfZ(dbz, ready)) * factor;
    if (ready.capIsRate && zRate > ready.capMmPerHour) zRate = ready.capMmPerHour;
    parts.zRate = zRate;
    parts.zCapped = dbz >= ready.capDbz;
    parts.rainRate = zRate;
    parts.kdpDegPerKm = Number.NaN;
    parts.kdpRate = Number.NaN;
    parts.kdpShare = 0;
    parts.zdrDb = Number.NaN;
    parts.zZdrRate = Number.NaN;
    parts.zZdrShare = 0;
    parts.attenuationRate = Number.NaN;
    parts.attenuationShare = 0;
    parts.hailShare = 0;
    if (dbz > this.#plainBelowDbz && isLiquid(this.#echo.marks[gate])) this.#join(gate, dbz, ready);
  }

  /** R(KDP) of a gate with hail; NaN where there is no KDP. */
  kdpRateUnderHail(gate: number): number {
    const { laws, kdpFactor } = this.#tables;
    if (laws === undefined) return Number.NaN;
    const rate = kdpFactor * rateOfKdp(this.#reader.kdpDegPerKm(gate), laws.kdp);
    return Math.min(mostPolarimetric(this.#readyOf(gate)), Math.max(0, rate));
  }

  #readyOf(gate: number): ReadyRelation {
    return this.#tables.byType[this.#rainType?.[gate] ?? RAIN_TYPE.none];
  }

  #join(gate: number, dbz: number, ready: ReadyRelation): void {
    const { laws, kdpZdrPart, kdpFactor } = this.#tables;
    const { polarimetric } = this.#settings;
    if (laws === undefined || polarimetric === undefined) return;
    const { kdpShare, attenuationShare } = polarimetric;
    const mayUseZdr = this.#zZdrShare > 0 && dbz > Z_ZDR_DBZ.from && dbz < Z_ZDR_DBZ.to;
    const parts = this.parts;
    const reader = this.#reader;
    const most = mostPolarimetric(ready);
    const rhohv = reader.rhohv(gate);
    const rainLike = Number.isNaN(rhohv) ? 1 : ramp(rhohv, RAIN_CORRELATION.from, RAIN_CORRELATION.to);
    const asksForHail = this.seesHail && mayBeHail(dbz, rhohv);
    const needsZdr = asksForHail || mayUseZdr || kdpZdrPart > 0;
    const zdr = needsZdr ? reader.zdrDb(gate) : Number.NaN;
    const zdrTrust = needsZdr ? reader.trust : 0;
    parts.zdrDb = zdr;
    if (asksForHail) parts.hailShare = zdrTrust * hailShare(dbz, zdr, rhohv);
    let rate = parts.zRate;
    if (mayUseZdr && zdrTrust > 0) {
      parts.zZdrRate = Math.min(most, rateOfZZdr(Math.min(dbz, ready.capDbz), zdr, laws.zZdr));
      const correlation = Number.isNaN(rhohv)
        ? 1
        : ramp(rhohv, Z_ZDR_CORRELATION.from, Z_ZDR_CORRELATION.full);
      const { from, full, fading, to } = Z_ZDR_DBZ;
      parts.zZdrShare =
        this.#zZdrShare *
        zdrTrust *
        correlation *
        ramp(zdr, Z_ZDR_FROM_ZDR_DB.from, Z_ZDR_FROM_ZDR_DB.full) *
        ramp(dbz, from, full) *
        (1 - ramp(dbz, fading, to));
      rate += parts.zZdrShare * (parts.zZdrRate - rate);
    }
    const attenuation = attenuationShare > 0 ? this.#attenuation?.[gate] : undefined;
    if (attenuation !== undefined && attenuation >= 0) {
      parts.attenuationRate = Math.min(most, rateOfAttenuation(attenuation, laws.attenuation));
      parts.attenuationShare =
        attenuationShare * rainLike * ramp(dbz, ATTENUATION_DBZ.from, ATTENUATION_DBZ.to);
      rate += parts.attenuationShare * (parts.attenuationRate - rate);
    }
    if (kdpShare > 0 && dbz > KDP_DBZ.from) {
      const kdp = reader.kdpDegPerKm(gate);
      parts.kdpDegPerKm = kdp;
      const share =
        kdpShare *
        reader.trust *
        ramp(dbz, KDP_DBZ.from, KDP_DBZ.to) *
        ramp(kdp, KDP_DEG_PER_KM.from, KDP_DEG_PER_KM.to);
      if (share > 0) {
        let kdpRate = kdpFactor * rateOfKdp(kdp, laws.kdp);
        if (kdpZdrPart > 0 && zdrTrust > 0) {
          kdpRate += kdpZdrPart * zdrTrust * rainLike * (rateOfKdpZdr(kdp, zdr, laws.kdpZdr) - kdpRate);
        }
        parts.kdpRate = Math.min(most, kdpRate);
        parts.kdpShare = share;
        rate += share * (parts.kdpRate - rate);
      }
    }
    parts.rainRate = rate;
  }
}
