import { CUSTOMARY_CAP_MM_PER_HOUR } from "../../cap.ts";
import { markBit, type PolarEcho } from "../polar-echo.ts";
import { RAIN_TYPE } from "../rain-type/steiner.ts";
import { dropNumberFactor } from "./drop-number.ts";
import { rateOfAttenuation, rateOfKdp, rateOfKdpZdr, rateOfZZdr } from "./estimators.ts";
import { hailShare, mayBeHail } from "./hail.ts";
import { isLiquid, MomentReader } from "./moment-reader.ts";
import { neighboursOfHail } from "./neighbours-of-hail.ts";
import { ramp } from "./ramp.ts";
import type { GateRateSettings } from "./rate-tables.ts";
import { type RateTables, type ReadyRelation, rateOfZ } from "./ready-relation.ts";

/** What the larger part of a gate's rate was made from; the numbers in `GateRatesOfSweep.method`. */
export const RATE_METHODS = [
  /** No rain, or not observed. */
  "none",
  "z",
  "z-zdr",
  "attenuation",
  "kdp",
  /** Hail: R(KDP), which hail has no part in. */
  "hail-kdp",
  /** Hail without KDP: the mean of the rain around it. */
  "hail-neighbours",
] as const;
export type RateMethod = (typeof RATE_METHODS)[number];

const METHOD = {
  z: RATE_METHODS.indexOf("z"),
  zZdr: RATE_METHODS.indexOf("z-zdr"),
  attenuation: RATE_METHODS.indexOf("attenuation"),
  kdp: RATE_METHODS.indexOf("kdp"),
  hailKdp: RATE_METHODS.indexOf("hail-kdp"),
  hailNeighbours: RATE_METHODS.indexOf("hail-neighbours"),
} as const;

/** Rain rates of one sweep, and what they were made from. Shapes [rayCount * gateCount]. */
export interface GateRatesOfSweep {
  /** mm/h; NaN not observed, 0 for undetect and below the cut-off. */
  readonly rateMmPerHour: Float32Array;
  /** 1 where the rate is held by a cap, else 0. */
  readonly capped: Uint8Array;
  /** Indices of {@link RATE_METHODS}. */
  readonly method: Uint8Array;
  /** Factor on every rate from Z, see `dropNumberFactor`; 1 where nothing was changed. */
  readonly dropNumberFactor: number;
  readonly counts: RateCounts;
  /** What the settings ask for and the sweep does not have, by name. */
  readonly lacking: readonly string[];
}

/** Gates, and sums of their rates in mm/h, so that a share can be told. */
export interface RateCounts {
  /** Gates with rain, and their rain. */
  wetGates: number;
  rate: number;
  convectiveGates: number;
  convectiveRate: number;
  hailGates: number;
  hailRate: number;
  /** Gates that the profile marked as melting snow or snow: their rate is that of Z and is not to be trusted. */
  frozenGates: number;
  frozenRate: number;
  /** By index of {@link RATE_METHODS}. */
  readonly gatesByMethod: number[];
}

/** One rate on its way: what each estimator says, and the share that it has. Filled anew for each gate. */
export interface RateParts {
  zRate: number;
  zCapped: boolean;
  kdpRate: number;
  kdpShare: number;
  zZdrRate: number;
  zZdrShare: number;
  attenuationRate: number;
  attenuationShare: number;
  hailShare: number;
  /** Without hail. */
  rainRate: number;
}

const HAIL = markBit("hail");
const CONVECTIVE = markBit("convective");

/**
 * Where the estimators meet, dBZ, deg/km and dB/km: between the two numbers the share of one rises and of the other
 * falls. R(KDP) comes in where R(Z) nears the hail cap, above the 38 dBZ and 0.3 deg/km of Cifelli et al. (2011).
 * House rule.
 */
const KDP_DBZ = { from: 45, to: 53 } as const;
const KDP_DEG_PER_KM = { from: 0.2, to: 0.5 } as const;
const Z_ZDR_DBZ = { from: 28, to: 35 } as const;
const ATTENUATION_DBZ = { from: 25, to: 35 } as const;
/** RHOHV of rain alone. */
const RAIN_CORRELATION = { from: 0.95, to: 0.98 } as const;

/** A polarimetric rate passes the hail cap, but not this; there is no customary limit above it. */
function mostPolarimetric({ capMmPerHour }: ReadyRelation): number {
  return Math.max(capMmPerHour, CUSTOMARY_CAP_MM_PER_HOUR.high);
}

/**
 * Rain rate of every gate of a corrected sweep. Marks gates as hail and as convective.
 *
 * R(Z) of the relation for the gate's type, held by the cap. Where the band's polarimetric moments hold (liquid
 * rain, RHOHV of rain), the number of drops, R(Z, ZDR), R(A) and R(KDP) take over by shares that rise and fall
 * without steps; under hail R(KDP) does, or the rain around it. Without those moments it is `gateRate`.
 *
 * @param echo - corrected for attenuation, ZDR and all; its `marks` are written to
 * @param rainType - shape [rayCount * gateCount], numbers of `RAIN_TYPE`; undefined for one relation everywhere
 * @param tables - of the same settings and the radar's wavelength
 * @param specificAttenuationDbPerKm - shape as `dbz`, one way; NaN where it is not known
 */
export function gateRates(
  echo: PolarEcho,
  rainType: Uint8Array | undefined,
  settings: GateRateSettings,
  tables: RateTables,
  specificAttenuationDbPerKm?: Float32Array,
): GateRatesOfSweep {
  const { dbz, marks } = echo;
  const blender = new RateBlender(echo, rainType, settings, tables, specificAttenuationDbPerKm);
  const { parts } = blender;
  const out: GateRatesOfSweep = {
    rateMmPerHour: new Float32Array(dbz.length),
    capped: new Uint8Array(dbz.length),
    method: new Uint8Array(dbz.length),
    dropNumberFactor: blender.dropNumberFactor,
    counts: emptyCounts(),
    lacking: lackingMoments(echo, settings, tables),
  };
  const { rateMmPerHour, capped, method } = out;
  const hailGates: number[] = [];
  const hail = new Float32Array(blender.seesHail ? dbz.length : 0);
  for (let gate = 0; gate < dbz.length; gate++) {
    const value = dbz[gate];
    if (!(value > Number.NEGATIVE_INFINITY)) {
      rateMmPerHour[gate] = value === Number.NEGATIVE_INFINITY ? 0 : Number.NaN;
      continue;
    }
    blender.blend(gate);
    rateMmPerHour[gate] = parts.rainRate;
    method[gate] = mainMethod(parts);
    if (method[gate] === METHOD.z && parts.zCapped) capped[gate] = 1;
    if (parts.hailShare > 0) {
      hail[gate] = parts.hailShare;
      hailGates.push(gate);
    }
    if (rainType?.[gate] === RAIN_TYPE.convective) marks[gate] |= CONVECTIVE;
  }
  putRainUnderHail(echo, blender, hail, hailGates, out);
  for (let gate = 0; gate < dbz.length; gate++) {
    if (!(rateMmPerHour[gate] < settings.minRateMmPerHour)) continue;
    rateMmPerHour[gate] = 0;
    method[gate] = 0;
  }
  count(out, marks);
  return out;
}

/** Second pass: the rain around hail is known only now. */
function putRainUnderHail(
  echo: PolarEcho,
  blender: RateBlender,
  hail: Float32Array,
  hailGates: readonly number[],
  { rateMmPerHour, capped, method }: GateRatesOfSweep,
): void {
  if (hailGates.length === 0) return;
  const withoutHail = rateMmPerHour.slice();
  for (const gate of hailGates) {
    const share = hail[gate];
    let underHail = blender.kdpRateUnderHail(gate);
    const byKdp = !Number.isNaN(underHail);
    if (!byKdp) underHail = neighboursOfHail(echo, withoutHail, hail, gate);
    rateMmPerHour[gate] = (1 - share) * withoutHail[gate] + share * underHail;
    if (share < 0.5) continue;
    echo.marks[gate] |= HAIL;
    capped[gate] = 0;
    method[gate] = byKdp ? METHOD.hailKdp : METHOD.hailNeighbours;
  }
}

/** Works out one gate after the other into {@link parts}. */
export class RateBlender {
  readonly dropNumberFactor: number;
  /** Whether hail can be told at all. */
  readonly seesHail: boolean;
  readonly parts: RateParts = {
    zRate: 0,
    zCapped: false,
    kdpRate: 0,
    kdpShare: 0,
    zZdrRate: 0,
    zZdrShare: 0,
    attenuationRate: 0,
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
  /** Echo below it has no polarimetric part. */
  readonly #plainBelowDbz: number;

  constructor(
    echo: PolarEcho,
    rainType: Uint8Array | undefined,
    settings: GateRateSettings,
    tables: RateTables,
    attenuation: Float32Array | undefined,
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
    this.dropNumberFactor =
      polarimetric?.dropNumber === true ? dropNumberFactor(echo, rainType, tables, this.#reader) : 1;
  }

  /** @param gate - one with echo */
  blend(gate: number): void {
    const { parts } = this;
    const dbz = this.#echo.dbz[gate];
    const ready = this.#readyOf(gate);
    const factor = this.dropNumberFactor;
    let zRate = (dbz >= ready.capDbz ? ready.capMmPerHour : rateOfZ(dbz, ready)) * factor;
    if (ready.capIsRate && zRate > ready.capMmPerHour) zRate = ready.capMmPerHour;
    parts.zRate = zRate;
    parts.zCapped = dbz >= ready.capDbz;
    parts.rainRate = zRate;
    parts.kdpShare = 0;
    parts.zZdrShare = 0;
    parts.attenuationShare = 0;
    parts.hailShare = 0;
    if (dbz > this.#plainBelowDbz && isLiquid(this.#echo.marks[gate])) this.#join(gate, dbz, ready);
  }

  /** R(KDP) of a gate with hail; NaN where there is no KDP. */
  kdpRateUnderHail(gate: number): number {
    const { laws } = this.#tables;
    if (laws === undefined) return Number.NaN;
    const rate = rateOfKdp(this.#reader.kdpDegPerKm(gate), laws.kdp);
    return Math.min(mostPolarimetric(this.#readyOf(gate)), Math.max(0, rate));
  }

  #readyOf(gate: number): ReadyRelation {
    return this.#tables.byType[this.#rainType?.[gate] ?? RAIN_TYPE.none];
  }

  #join(gate: number, dbz: number, ready: ReadyRelation): void {
    const { laws } = this.#tables;
    const { polarimetric } = this.#settings;
    if (laws === undefined || polarimetric === undefined) return;
    const { kdpShare, kdpZdrPart, zZdrShare, attenuationShare } = polarimetric;
    const parts = this.parts;
    const reader = this.#reader;
    const most = mostPolarimetric(ready);
    const rhohv = reader.rhohv(gate);
    const rainLike = Number.isNaN(rhohv) ? 1 : ramp(rhohv, RAIN_CORRELATION.from, RAIN_CORRELATION.to);
    const asksForHail = this.seesHail && mayBeHail(dbz, rhohv);
    const needsZdr = asksForHail || zZdrShare > 0 || kdpZdrPart > 0;
    const zdr = needsZdr ? reader.zdrDb(gate) : Number.NaN;
    const zdrTrust = needsZdr ? reader.trust : 0;
    if (asksForHail) parts.hailShare = zdrTrust * hailShare(dbz, zdr, rhohv);
    let rate = parts.zRate;
    if (zZdrShare > 0 && zdrTrust > 0) {
      parts.zZdrRate = Math.min(most, rateOfZZdr(Math.min(dbz, ready.capDbz), zdr, laws.zZdr));
      parts.zZdrShare = zZdrShare * zdrTrust * rainLike * ramp(dbz, Z_ZDR_DBZ.from, Z_ZDR_DBZ.to);
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
      const share =
        kdpShare *
        reader.trust *
        ramp(dbz, KDP_DBZ.from, KDP_DBZ.to) *
        ramp(kdp, KDP_DEG_PER_KM.from, KDP_DEG_PER_KM.to);
      if (share > 0) {
        let kdpRate = rateOfKdp(kdp, laws.kdp);
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

function mainMethod({ kdpShare, attenuationShare, zZdrShare }: RateParts): number {
  if (kdpShare >= 0.5) return METHOD.kdp;
  const left = 1 - kdpShare;
  if (left * attenuationShare >= 0.5) return METHOD.attenuation;
  return left * (1 - attenuationShare) * zZdrShare >= 0.5 ? METHOD.zZdr : METHOD.z;
}

function emptyCounts(): RateCounts {
  return {
    wetGates: 0,
    rate: 0,
    convectiveGates: 0,
    convectiveRate: 0,
    hailGates: 0,
    hailRate: 0,
    frozenGates: 0,
    frozenRate: 0,
    gatesByMethod: RATE_METHODS.map(() => 0),
  };
}

function count({ rateMmPerHour, method, counts }: GateRatesOfSweep, marks: Uint16Array): void {
  for (let gate = 0; gate < rateMmPerHour.length; gate++) {
    const rate = rateMmPerHour[gate];
    counts.gatesByMethod[method[gate]]++;
    const mark = marks[gate];
    if ((mark & HAIL) !== 0) counts.hailGates++;
    if (!(rate > 0)) continue;
    counts.wetGates++;
    counts.rate += rate;
    if ((mark & HAIL) !== 0) counts.hailRate += rate;
    if (!isLiquid(mark)) {
      counts.frozenGates++;
      counts.frozenRate += rate;
    }
    if ((mark & CONVECTIVE) !== 0) {
      counts.convectiveGates++;
      counts.convectiveRate += rate;
    }
  }
}

function lackingMoments(
  { zdrDb, rhohv, kdpDegPerKm, header }: PolarEcho,
  { polarimetric }: GateRateSettings,
  { laws }: RateTables,
): string[] {
  if (polarimetric === undefined) return [];
  const lacking: string[] = [];
  if (header.wavelengthM === undefined) lacking.push("wavelength");
  else if (laws === undefined) lacking.push("coefficients for this wavelength");
  if (kdpDegPerKm === undefined) lacking.push("KDP");
  if (zdrDb === undefined) lacking.push("ZDR");
  if (rhohv === undefined) lacking.push("RHOHV");
  return lacking;
}
