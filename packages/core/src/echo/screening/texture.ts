import { screenBit } from "../polar-echo.ts";
import type { Evidence } from "./evidence.ts";
import type { SweepView } from "./sweep-view.ts";

/** Texture above which an echo is suspect, dB2, and spin change, per cent. Common practice: 45 (25 to 65), 50 (30 to 70). */
export const SUSPECT_TEXTURE_DB2 = 45;
export const SUSPECT_SPIN_PERCENT = 50;
/** Mean difference between neighbours from which a change of sign counts. From memory of Steiner and Smith (2002). */
const SPIN_THRESHOLD_DB = 2;
/** Gates to either side that a window holds, and pairs of neighbours that it needs. House rule. */
const REACH = 2;
const ENOUGH_PAIRS = 3;

/**
 * Texture of reflectivity: mean squared difference of neighbouring gates.
 *
 * Source: Kessinger, Ellis and Van Andel (2003), 3rd Conf. on Artificial Intelligence, AMS; Hubbert, Dixon and
 * Ellis (2009), J. Atmos. Oceanic Technol. 26, 1181-1197. Divided by the number of differences.
 *
 * @param dbz - gates along a ray; a pair that lacks one is left out
 * @returns dB2; NaN without any pair
 */
export function textureDb2(dbz: ArrayLike<number>): number {
  let sum = 0;
  let pairs = 0;
  for (let gate = 1; gate < dbz.length; gate++) {
    const step = (dbz[gate] as number) - (dbz[gate - 1] as number);
    if (!Number.isFinite(step)) continue;
    sum += step * step;
    pairs++;
  }
  return sum / pairs;
}

/**
 * Spin change: share of inner gates at which the slope changes sign and is steep on the mean of both sides.
 *
 * Source: Steiner and Smith (2002), J. Atmos. Oceanic Technol. 19, 673-686.
 *
 * @param dbz - gates along a ray; a gate that lacks a neighbour is left out
 * @returns per cent; NaN without any inner gate
 */
export function spinChangePercent(dbz: ArrayLike<number>, thresholdDb: number = SPIN_THRESHOLD_DB): number {
  let changes = 0;
  let inner = 0;
  for (let gate = 1; gate + 1 < dbz.length; gate++) {
    const before = (dbz[gate] as number) - (dbz[gate - 1] as number);
    const after = (dbz[gate + 1] as number) - (dbz[gate] as number);
    if (!Number.isFinite(before) || !Number.isFinite(after)) continue;
    inner++;
    if (isSpin(before, after, thresholdDb)) changes++;
  }
  return (100 * changes) / inner;
}

function isSpin(before: number, after: number, thresholdDb: number): boolean {
  return before * after < 0 && (Math.abs(before) + Math.abs(after)) / 2 > thresholdDb;
}

/** Bits of what is rough at a gate. */
const ROUGH = 1;
const SPINNING = 2;

/**
 * How rough echo is at one gate: texture and spin change in a window of five gates along the ray.
 *
 * @param start - index of the ray's first gate
 * @returns bits ROUGH and SPINNING; 0 too where the window holds too little echo to say
 */
function roughnessAt(dbz: Float32Array, start: number, gate: number, gateCount: number): number {
  const first = gate < REACH ? 0 : gate - REACH;
  const last = Math.min(gateCount - 1, gate + REACH);
  let sum = 0;
  let pairs = 0;
  let changes = 0;
  let inner = 0;
  let before = Number.NaN;
  for (let at = start + first; at < start + last; at++) {
    const step = (dbz[at + 1] as number) - (dbz[at] as number);
    // NaN and Infinity alike: one of the pair has no echo.
    if (step - step !== 0) {
      before = Number.NaN;
      continue;
    }
    sum += step * step;
    pairs++;
    if (!Number.isNaN(before)) {
      inner++;
      if (isSpin(before, step, SPIN_THRESHOLD_DB)) changes++;
    }
    before = step;
  }
  if (pairs < ENOUGH_PAIRS) return 0;
  return (
    (sum > SUSPECT_TEXTURE_DB2 * pairs ? ROUGH : 0) |
    (100 * changes > SUSPECT_SPIN_PERCENT * inner ? SPINNING : 0)
  );
}

/**
 * Weak: rough and spinning ("texture"), which the edges of showers seldom are at once; and rough while it stands
 * still ("still-echo"). Rain whose wind blows across the beam stands still too, and so does a slow shower, but
 * its echo is smooth.
 *
 * Both only ever support, so only gates that something speaks against already are looked at.
 *
 * Sources: Steiner and Smith (2002) for the one, Hubbert, Dixon and Ellis (2009) for the other, as above.
 *
 * @param which - bits of the screens that are asked for
 */
export function screenRoughness(
  { echo, rayCount, gateCount, echoAt, echoStart }: SweepView,
  which: number,
  evidence: Evidence,
): void {
  const { strong, weak } = evidence;
  const { measuredDbz, velocityMPerS, spectrumWidthMPerS } = echo;
  const textureBit = which & screenBit("texture");
  const stillBit = velocityMPerS === undefined ? 0 : which & screenBit("still-echo");
  for (let ray = 0; ray < rayCount; ray++) {
    const start = ray * gateCount;
    for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k++) {
      const at = echoAt[k] as number;
      if (((strong[at] as number) | (weak[at] as number)) === 0) continue;
      const rough = roughnessAt(measuredDbz, start, at - start, gateCount);
      if ((rough & ROUGH) === 0) continue;
      let bits = (rough & SPINNING) === 0 ? 0 : textureBit;
      if (stillBit !== 0 && isStill(velocityMPerS?.[at], spectrumWidthMPerS?.[at])) bits |= stillBit;
      weak[at] = (weak[at] as number) | bits;
    }
  }
}

/** Ground echo stays below these. Common practice: 1 m/s (0.5 to 1.5) each. */
export const STILL_VELOCITY_M_PER_S = 1;
export const STILL_WIDTH_M_PER_S = 1;

/** A width that is not given, or not observed, does not speak against it. */
function isStill(velocityMPerS: number | undefined, widthMPerS: number | undefined): boolean {
  if (velocityMPerS === undefined || !(Math.abs(velocityMPerS) < STILL_VELOCITY_M_PER_S)) return false;
  return !(widthMPerS !== undefined && widthMPerS > STILL_WIDTH_M_PER_S);
}
