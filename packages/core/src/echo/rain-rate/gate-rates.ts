import type { ZrRelation } from "../../zr-relation.ts";
import { markBit, type PolarEcho } from "../polar-echo.ts";
import { RAIN_TYPE } from "../rain-type/steiner.ts";
import type { ComparedGates } from "./drop-number.ts";
import { isLiquid } from "./moment-reader.ts";
import { neighboursOfHail } from "./neighbours-of-hail.ts";
import { RateBlender, type RateParts } from "./rate-blender.ts";
import type { GateRateSettings } from "./rate-tables.ts";
import type { RateTables } from "./ready-relation.ts";

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
  /** Factor on every rate from Z, see `dropSizeRatio`; 1 where nothing was changed. */
  readonly dropSizeFactor: number;
  /** A further one, see `dropNumberFactor`. */
  readonly dropNumberFactor: number;
  readonly counts: RateCounts;
  /** What {@link gateRatesUnder} can take over. */
  readonly compared: ComparedGates | undefined;
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

const HAIL = markBit("hail");
const CONVECTIVE = markBit("convective");

/**
 * Rain rate of every gate of a corrected sweep. Marks gates as hail and as convective.
 *
 * R(Z) of the relation for the gate's type, held by the cap. Where the band's polarimetric moments hold (liquid
 * rain, RHOHV of rain), size and number of drops, R(Z, ZDR), R(A) and R(KDP) take over by shares that rise and fall
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
  const first = ratesBesideHail(echo, blender);
  const out: GateRatesOfSweep = {
    rateMmPerHour: first.rateMmPerHour,
    capped: first.capped,
    method: first.method,
    dropSizeFactor: tables.dropSizeFactor,
    dropNumberFactor: blender.dropNumberFactor,
    counts: emptyCounts(),
    compared: blender.compared,
    lacking: lackingMoments(echo, settings, tables),
  };
  putRainUnderHail(echo, blender, first);
  const { rateMmPerHour, method } = out;
  for (let gate = 0; gate < dbz.length; gate++) {
    if (rainType?.[gate] === RAIN_TYPE.convective && dbz[gate] > Number.NEGATIVE_INFINITY) {
      marks[gate] |= CONVECTIVE;
    }
    if (!(rateMmPerHour[gate] < settings.minRateMmPerHour)) continue;
    rateMmPerHour[gate] = 0;
    method[gate] = 0;
  }
  count(out, marks);
  return out;
}

/**
 * Rates of some gates of the same sweep under another relation, as {@link gateRates} would make them; nothing is marked.
 *
 * @param settings - the same but for the relation
 * @param gates - that are asked for; one may stand in it twice
 * @param compared - as the rates under the first relation have it
 * @returns mm/h, shape [rayCount * gateCount]; NaN where not observed or not asked for
 */
export function gateRatesUnder(
  echo: PolarEcho,
  rainType: Uint8Array | undefined,
  settings: GateRateSettings,
  tables: RateTables,
  gates: Int32Array,
  compared?: ComparedGates,
  specificAttenuationDbPerKm?: Float32Array,
): Float32Array {
  const { dbz } = echo;
  const blender = new RateBlender(echo, rainType, settings, tables, specificAttenuationDbPerKm, compared);
  const { parts } = blender;
  const rateMmPerHour = new Float32Array(dbz.length).fill(Number.NaN);
  let besideHail: RatesBesideHail | undefined;
  for (let k = 0; k < gates.length; k++) {
    const gate = gates[k];
    if (!(dbz[gate] > Number.NEGATIVE_INFINITY)) {
      if (dbz[gate] === Number.NEGATIVE_INFINITY) rateMmPerHour[gate] = 0;
      continue;
    }
    blender.blend(gate);
    // As a gate's rate is kept between the two passes.
    const share = Math.fround(parts.hailShare);
    let rate = Math.fround(parts.rainRate);
    if (share > 0) {
      let underHail = blender.kdpRateUnderHail(gate);
      if (Number.isNaN(underHail)) {
        besideHail ??= ratesBesideHail(echo, blender);
        underHail = neighboursOfHail(echo, besideHail.rateMmPerHour, besideHail.hail, gate);
      }
      rate = Math.fround((1 - share) * rate + share * underHail);
    }
    rateMmPerHour[gate] = rate < settings.minRateMmPerHour ? 0 : rate;
  }
  return rateMmPerHour;
}

/** How the rate of one gate came about; with `settings.minRateMmPerHour` all that its last step needs. */
export interface GateRateAccount extends RateParts {
  readonly relation: ZrRelation;
  readonly capDbz: number;
  readonly capMmPerHour: number;
  readonly dropSizeFactor: number;
  readonly dropNumberFactor: number;
  /** Rain under hail, and where it is from; undefined where the gate has no part of hail. */
  readonly underHail: { readonly rateMmPerHour: number; readonly from: "kdp" | "neighbours" } | undefined;
  /** As {@link gateRates} gives it, before it is rounded to float32. */
  readonly rateMmPerHour: number;
}

/**
 * The account of a gate's rate, step by step: `zRate`, held by the cap and times the factors of size and number of
 * drops; from it
 * `zZdrShare`, then `attenuationShare`, then `kdpShare` of the way to the rate of each, which is `rainRate`; from
 * that `hailShare` of the way to the rain under hail; nothing below the cut-off.
 *
 * @param gate - ray * gateCount + gate, one with echo
 * @throws RangeError where the gate has no echo
 */
export function gateRateAccount(
  echo: PolarEcho,
  rainType: Uint8Array | undefined,
  settings: GateRateSettings,
  tables: RateTables,
  gate: number,
  specificAttenuationDbPerKm?: Float32Array,
): GateRateAccount {
  if (!(echo.dbz[gate] > Number.NEGATIVE_INFINITY)) throw new RangeError(`gate ${gate} has no echo`);
  const blender = new RateBlender(echo, rainType, settings, tables, specificAttenuationDbPerKm);
  blender.blend(gate);
  const parts = { ...blender.parts };
  const { relation, capDbz, capMmPerHour } = tables.byType[rainType?.[gate] ?? RAIN_TYPE.none];
  let underHail: GateRateAccount["underHail"];
  let rate = parts.rainRate;
  if (parts.hailShare > 0) {
    const byKdp = blender.kdpRateUnderHail(gate);
    if (!Number.isNaN(byKdp)) underHail = { rateMmPerHour: byKdp, from: "kdp" };
    else {
      const { rateMmPerHour, hail } = ratesBesideHail(echo, blender);
      underHail = { rateMmPerHour: neighboursOfHail(echo, rateMmPerHour, hail, gate), from: "neighbours" };
    }
    // As a gate's rate is kept between the two passes.
    rate =
      (1 - Math.fround(parts.hailShare)) * Math.fround(rate) +
      Math.fround(parts.hailShare) * underHail.rateMmPerHour;
  }
  return {
    ...parts,
    relation,
    capDbz,
    capMmPerHour,
    dropSizeFactor: tables.dropSizeFactor,
    dropNumberFactor: blender.dropNumberFactor,
    underHail,
    rateMmPerHour: Math.fround(rate) < settings.minRateMmPerHour ? 0 : rate,
  };
}

/** Rates as if there were no hail, and where it is; shapes as `dbz`, but that `hail` is empty where none can be told. */
interface RatesBesideHail {
  readonly rateMmPerHour: Float32Array;
  readonly capped: Uint8Array;
  readonly method: Uint8Array;
  /** Share of hail by gate, and the gates that have any. */
  readonly hail: Float32Array;
  readonly hailGates: readonly number[];
}

/** First pass, gate by gate. */
function ratesBesideHail({ dbz }: PolarEcho, blender: RateBlender): RatesBesideHail {
  const { parts } = blender;
  const rateMmPerHour = new Float32Array(dbz.length);
  const capped = new Uint8Array(dbz.length);
  const method = new Uint8Array(dbz.length);
  const hail = new Float32Array(blender.seesHail ? dbz.length : 0);
  const hailGates: number[] = [];
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
  }
  return { rateMmPerHour, capped, method, hail, hailGates };
}

/** Second pass: the rain around hail is known only now. */
function putRainUnderHail(
  echo: PolarEcho,
  blender: RateBlender,
  { rateMmPerHour, capped, method, hail, hailGates }: RatesBesideHail,
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
  { laws, byType }: RateTables,
): string[] {
  if (polarimetric === undefined) return [];
  const lacking: string[] = [];
  if (header.wavelengthM === undefined) lacking.push("wavelength");
  else if (byType.some(({ relation }) => relation.phase === "snow")) lacking.push("a relation for rain");
  else if (laws === undefined) lacking.push("coefficients for this wavelength");
  if (kdpDegPerKm === undefined) lacking.push("KDP");
  if (zdrDb === undefined) lacking.push("ZDR");
  if (rhohv === undefined) lacking.push("RHOHV");
  return lacking;
}
