import {
  EchoChain,
  firstScreenOf,
  type GateRateSettings,
  gateRate,
  gateRates,
  gateRatesUnder,
  type MeasuredEcho,
  markBit,
  type PolarEcho,
  PROFILE_BAND_M,
  type RateSettings,
  type RateTables,
  rateTables,
  resolveCap,
  SCREENS,
  type ZrRelation,
} from "@rainreckon/core";
import {
  type GateRates,
  type PolarLookup,
  rainTypeOfGates,
  trustIn,
  type VariantRates,
} from "@rainreckon/mosaic";
import { COMPANIONS, companionIndex, tollName } from "./companions.ts";
import type { JobEcho, JobRadar, RatesMade, UnitCounts } from "./job.ts";
import type { LayerShape } from "./round-layers.ts";

/** What a worked sweep says, by gate: under the relation in use, and under each other one. */
export interface WorkedRain {
  readonly gates: GateRates;
  readonly others: readonly VariantRates[];
  readonly made: RatesMade;
}

const BITS = {
  filled: markBit("filled"),
  lost: markBit("lost-in-attenuation"),
  blocked: markBit("blocked"),
  hail: markBit("hail"),
  melting: markBit("melting"),
  snow: markBit("snow"),
  sideLobe: markBit("side-lobe"),
  convective: markBit("convective"),
} as const;

/** Takes the echo of one radar through all steps to rain, with what is to be known of it beside. */
export class EchoWork {
  readonly #radar: JobRadar;
  readonly #echo: JobEcho;
  readonly #shape: LayerShape;
  readonly #chain: EchoChain;
  readonly #tables = new Map<string, RateTables>();

  constructor(radar: JobRadar, echo: JobEcho, shape: LayerShape) {
    this.#radar = radar;
    this.#echo = echo;
    this.#shape = shape;
    this.#chain = new EchoChain(echo.settings, echo.learned);
  }

  /**
   * @param echo - is worked on in place
   * @param above - the sweep above, as measured
   * @param headlineGates - those that are asked for under other relations
   */
  rain(
    echo: PolarEcho,
    above: MeasuredEcho | undefined,
    lookup: PolarLookup,
    relation: ZrRelation,
    headlineGates: Int32Array,
  ): WorkedRain {
    const { grid, variants } = this.#shape;
    this.#chain.correct(echo, above);
    const type = this.#echo.rainType ? rainTypeOfGates(lookup, grid, echo.dbz) : undefined;
    this.#chain.bringDown(echo, type);
    const inUse = this.#method(relation, echo.header.wavelengthM, true);
    const { rateMmPerHour, capped, method, compared, ...factors } = gateRates(
      echo,
      type,
      inUse.settings,
      inUse.tables,
    );
    const companions = this.#companions(echo, relation);
    return {
      gates: { codes: undefined, rateMmPerHour, capped, trust: trustOf(echo), companions },
      made: {
        method,
        dropSizeFactor: factors.dropSizeFactor,
        dropNumberFactor: factors.dropNumberFactor,
        rainType: type,
      },
      others: variants.map((variant) => {
        // The relation in use is mostly one of those that the headline is asked under.
        if (this.#isAlone && sameRelation(variant, relation)) return { codes: undefined, rateMmPerHour };
        const { settings, tables } = this.#method(variant, echo.header.wavelengthM, false);
        const other = gateRatesUnder(echo, type, settings, tables, headlineGates, compared);
        return { codes: undefined, rateMmPerHour: other };
      }),
    };
  }

  /** True where one relation makes all rain. */
  get #isAlone(): boolean {
    const { convective, stratiform } = this.#echo.rate;
    return convective === undefined && stratiform === undefined;
  }

  /** Adds what was done to a worked sweep to the counts. */
  count(echo: PolarEcho, counts: UnitCounts): void {
    const { measuredDbz, screenedBy, marks } = echo;
    countProfile(echo, counts);
    for (let gate = 0; gate < marks.length; gate++) {
      if ((measuredDbz[gate] as number) > Number.NEGATIVE_INFINITY) counts.gatesWithEcho++;
      const screened = screenedBy[gate] as number;
      if (screened !== 0) counts.gatesScreened[SCREENS.indexOf(firstScreenOf(screened))]++;
      const mark = marks[gate] as number;
      if (mark === 0) continue;
      if ((mark & BITS.filled) !== 0) counts.gatesFilled++;
      if ((mark & BITS.lost) !== 0) counts.gatesLostInAttenuation++;
      if ((mark & BITS.blocked) !== 0) counts.gatesBlocked++;
      if ((mark & BITS.hail) !== 0) counts.gatesHail++;
      if ((mark & BITS.melting) !== 0) counts.gatesMelting++;
      if ((mark & BITS.snow) !== 0) counts.gatesSnow++;
      if ((mark & BITS.sideLobe) !== 0) counts.gatesBesideCores++;
    }
  }

  #settings(relation: ZrRelation): RateSettings {
    const { cap, minRateMmPerHour } = this.#radar;
    return { relation, cap: resolveCap(cap, relation), minRateMmPerHour, offsetDb: 0 };
  }

  /** How echo becomes rain under a relation. */
  #method(
    relation: ZrRelation,
    wavelengthM: number | undefined,
    isInUse: boolean,
  ): { readonly settings: GateRateSettings; readonly tables: RateTables } {
    const { a, b, phase } = relation;
    const key = [a, b, phase, wavelengthM, isInUse].join();
    const { cap, minRateMmPerHour } = this.#radar;
    const { convective, stratiform, polarimetric } = this.#echo.rate;
    const settings: GateRateSettings = {
      relation,
      // A headline under another relation is one under it alone.
      ...(isInUse ? { convective, stratiform } : {}),
      cap,
      minRateMmPerHour,
      polarimetric,
    };
    let tables = this.#tables.get(key);
    if (tables === undefined) {
      tables = rateTables(settings, wavelengthM, this.#echo.learned);
      this.#tables.set(key, tables);
    }
    return { settings, tables };
  }

  /** In the order of COMPANIONS; undefined where 0 everywhere. */
  #companions(echo: PolarEcho, relation: ZrRelation): (Float32Array | undefined)[] {
    const list: (Float32Array | undefined)[] = COMPANIONS.map(() => undefined);
    for (const effect of ["blockage", "attenuation", "gas", "profile"] as const) {
      list[companionIndex(`${effect}_correction`)] = echo.effectsDb.get(effect);
    }
    list[companionIndex("two_way_loss")] = echo.twoWayLossDb;
    list[companionIndex("blocked_fraction")] = echo.blockedFraction;
    sharesOf(echo.marks, list);
    this.#tolls(echo, relation, list);
    return list;
  }

  /** Rain that screened gates would have made under the relation in use, under the first screen that took each. */
  #tolls(
    { measuredDbz, screenedBy }: PolarEcho,
    relation: ZrRelation,
    list: (Float32Array | undefined)[],
  ): void {
    const settings = { ...this.#settings(relation), offsetDb: this.#echo.settings.offsetDb };
    const first = companionIndex(tollName(SCREENS[0]));
    for (let gate = 0; gate < screenedBy.length; gate++) {
      const bits = screenedBy[gate] as number;
      if (bits === 0) continue;
      const { rate } = gateRate(measuredDbz[gate] as number, settings);
      if (!(rate > 0)) continue;
      const at = first + SCREENS.indexOf(firstScreenOf(bits));
      list[at] ??= new Float32Array(screenedBy.length);
      (list[at] as Float32Array)[gate] = rate;
    }
  }
}

function sameRelation(one: ZrRelation, other: ZrRelation): boolean {
  return one.a === other.a && one.b === other.b && one.phase === other.phase;
}

/** What the vertical profile added, by range. */
function countProfile({ header, dbz, effectsDb }: PolarEcho, { profileBands }: UnitCounts): void {
  const added = effectsDb.get("profile");
  if (added === undefined) return;
  const { gateCount, firstGateCentreM, gateLengthM } = header;
  for (let gate = 0; gate < gateCount; gate++) {
    const at = Math.floor((firstGateCentreM + gate * gateLengthM) / PROFILE_BAND_M);
    const band = profileBands[Math.min(Math.max(at, 0), profileBands.length - 1)];
    for (let k = gate; k < dbz.length; k += gateCount) {
      if (Number.isNaN(added[k])) band.lostGates++;
      if (!(dbz[k] > Number.NEGATIVE_INFINITY)) continue;
      band.wetGates++;
      // Whole hundredths, so that the sum does not depend on how a run was cut.
      band.addedCentiDb += Math.round(100 * added[k]);
    }
  }
}

/** Companions that are 1 where a gate bears a mark, else 0. */
const SHARES = (["filled", "hail", "melting", "snow", "convective"] as const).map((mark) => ({
  bit: BITS[mark],
  companion: companionIndex(`${mark}_fraction`),
}));

/** Puts them into the list of companions where any gate bears the mark. */
function sharesOf(marks: Uint16Array, list: (Float32Array | undefined)[]): void {
  const asked = SHARES.reduce((bits, { bit }) => bits | bit, 0);
  let met = 0;
  for (let gate = 0; gate < marks.length; gate++) met |= marks[gate] as number;
  if ((met & asked) === 0) return;
  for (const { bit, companion } of SHARES) {
    if ((met & bit) === 0) continue;
    const share = new Float32Array(marks.length);
    for (let gate = 0; gate < marks.length; gate++)
      if (((marks[gate] as number) & bit) !== 0) share[gate] = 1;
    list[companion] = share;
  }
}

/** How far each gate is to be trusted for what was lost on the way; undefined where nothing was. */
function trustOf({ blockedFraction, twoWayLossDb }: PolarEcho): Float32Array | undefined {
  if (blockedFraction === undefined && twoWayLossDb === undefined) return undefined;
  const length = (blockedFraction ?? twoWayLossDb)?.length ?? 0;
  const trust = new Float32Array(length);
  let [blocked, loss, last] = [Number.NaN, Number.NaN, Number.NaN];
  for (let gate = 0; gate < length; gate++) {
    // Not known is taken for nothing: a weight of NaN would silence the gate.
    const [share, lossDb] = [blockedFraction?.[gate] || 0, twoWayLossDb?.[gate] || 0];
    // Between showers nothing changes from gate to gate, and powers are slow.
    if (share !== blocked || lossDb !== loss) {
      [blocked, loss] = [share, lossDb];
      last = trustIn(share, lossDb);
    }
    trust[gate] = last;
  }
  return trust;
}
