import {
  EFFECTS,
  type Effect,
  MARKS,
  markBit,
  momentValue,
  RAIN_TYPE,
  RATE_METHODS,
  SCREENS,
  type Sweep,
  screenBit,
  type ZrRelation,
} from "@rainreckon/core";
import type { SpokenSweep } from "../total/job.ts";
import type { GateAccount } from "./schema.ts";

/** Why a gate says nothing of rain, the plainest reason first; undefined where it speaks. */
export function silenceOf({ rateMmPerHour, screenedBy, marks, measured }: GateAccount): string | undefined {
  if (rateMmPerHour !== null) return undefined;
  if (measured === "not observed") return "not observed";
  if (screenedBy[0] !== undefined) return `screened (${screenedBy[0]})`;
  if (marks.includes("lost-in-attenuation")) return "lost in attenuation";
  return marks.includes("blocked") ? "blocked" : "not observed";
}

/** Everything that made the rate of one gate of a sweep. */
export function gateAccount(spoken: SpokenSweep, stored: Sweep, index: number): GateAccount {
  const { echo, gates, made, radar } = spoken;
  const { gateCount, firstGateCentreM, gateLengthM } = stored;
  const gate = index % gateCount;
  const ray = (index - gate) / gateCount;
  const moment = stored.moments.get(radar.moment);
  const storedValue = moment?.stored[index];
  const measuredDbz =
    echo?.measuredDbz[index] ??
    (moment === undefined || storedValue === undefined ? Number.NaN : momentValue(storedValue, moment));
  const effectOf = (effect: Effect): number => {
    if (echo === undefined) return effect === "calibration" && measuredDbz > -Infinity ? radar.offsetDb : 0;
    return finite(echo.effectsDb.get(effect)?.[index]) ?? 0;
  };
  const effectsDb = {
    calibration: effectOf("calibration"),
    blockage: effectOf("blockage"),
    gas: effectOf("gas"),
    attenuation: effectOf("attenuation"),
    profile: effectOf("profile"),
  };
  const added = EFFECTS.reduce((sum, effect) => sum + effectsDb[effect], 0);
  const dbz = echo === undefined ? measuredDbz + added : (echo.dbz[index] as number);
  const screens = echo?.screenedBy[index] ?? 0;
  const marks = echo?.marks[index] ?? 0;
  const filled = (marks & markBit("filled")) !== 0;
  const key = gates.codes === undefined ? index : (gates.codes[index] as number);
  const rate = gates.rateMmPerHour[key] as number;
  const speaks = rate >= 0;
  return {
    ray,
    gate,
    azimuthDeg: stored.azimuthDeg[ray] as number,
    rangeKm: (firstGateCentreM + gate * gateLengthM) / 1000,
    stored: finite(storedValue),
    measured: Number.isNaN(measuredDbz)
      ? "not observed"
      : measuredDbz === Number.NEGATIVE_INFINITY
        ? "below detection"
        : "echo",
    measuredDbz: finite(measuredDbz),
    screenedBy: SCREENS.filter((screen) => (screens & screenBit(screen)) !== 0),
    filledDbz: filled ? finite(dbz - added) : null,
    effectsDb,
    marks: MARKS.filter((mark) => (marks & markBit(mark)) !== 0),
    twoWayLossDb: finite(echo?.twoWayLossDb?.[index]),
    blockedFraction: finite(echo?.blockedFraction?.[index]),
    zdrDb: finite(echo?.zdrDb?.[index]),
    rhohv: finite(echo?.rhohv?.[index]),
    kdpDegPerKm: finite(echo?.kdpDegPerKm?.[index]),
    dbz: finite(dbz),
    method: speaks ? methodOf(made?.method[index], rate) : null,
    relation: speaks && rate > 0 ? relationText(relationOf(spoken, index)) : null,
    capped: speaks && gates.capped[key] === 1,
    rateMmPerHour: speaks ? rate : null,
  };
}

function methodOf(index: number | undefined, rate: number): GateAccount["method"] {
  return RATE_METHODS[index ?? RATE_METHODS.indexOf(rate > 0 ? "z" : "none")] ?? null;
}

/** The relation in use, or that of the gate's rain type where the plan has one. */
function relationOf({ radar, made, relation }: SpokenSweep, index: number): ZrRelation {
  const type = made?.rainType?.[index];
  if (type === RAIN_TYPE.convective) return radar.echo?.rate.convective ?? relation;
  if (type === RAIN_TYPE.stratiform) return radar.echo?.rate.stratiform ?? relation;
  return relation;
}

export function relationText({ a, b }: ZrRelation): string {
  return `${a}/${b}`;
}

/** A number, or null where there is none. */
export function finite(value: number | undefined | null): number | null {
  return typeof value === "number" && Number.isFinite(value) ? value : null;
}
