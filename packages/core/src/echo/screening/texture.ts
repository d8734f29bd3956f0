import { screenBit } from "../polar-echo.ts";
import type { Evidence } from "./evidence.ts";
import type { SweepView } from "./sweep-view.ts";

/** Texture above which an echo is suspect, dB2, and spin change, per cent. Common practice: 45 (25 to 65), 50 (30 to 70). */
export const SUSPECT_TEXTURE_DB2 = 45;
export const SUSPECT_SPIN_PERCENT = 50;
/** Mean difference between neighbours from which a change of sign counts. From memory of Steiner and Smith (2002). */
export const SPIN_THRESHOLD_DB = 2;
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
export const ROUGH = 1;
export const SPINNING = 2;

/**
 * Where echo is rough: texture and spin change in a window of five gates along the ray.
 *
 * @returns shape [gates], bits ROUGH and SPINNING; 0 too where the window holds too little echo to say
 */
export function roughness({ echo, rayCount, gateCount }: SweepView): Uint8Array {
  const { measuredDbz } = echo;
  const rough = new Uint8Array(measuredDbz.length);
  // Of pair k, gates k and k + 1: the square of its step; and whether the slope turns at gate k.
  const square = new Float32Array(gateCount);
  const turns = new Int8Array(gateCount);
  for (let ray = 0; ray < rayCount; ray++) {
    const start = ray * gateCount;
    let before = Number.NaN;
    for (let gate = 0; gate < gateCount; gate++) {
      const after =
        gate + 1 < gateCount
          ? (measuredDbz[start + gate + 1] as number) - (measuredDbz[start + gate] as number)
          : Number.NaN;
      const known = after - after === 0;
      square[gate] = known ? after * after : -1;
      turns[gate] = !known || before - before !== 0 ? -1 : isSpin(before, after, SPIN_THRESHOLD_DB) ? 1 : 0;
      before = after;
    }
    let sum = 0;
    let pairs = 0;
    let changes = 0;
    let inner = 0;
    // The window of gate g holds pairs g - 2 to g + 1 and inner gates g - 1 to g + 1.
    for (let gate = -REACH; gate < gateCount; gate++) {
      const joins = gate + REACH - 1;
      if (joins < gateCount) {
        if ((square[joins] as number) >= 0 && joins >= 0) {
          sum += square[joins] as number;
          pairs++;
        }
        if (joins >= 0 && (turns[joins] as number) >= 0) {
          inner++;
          changes += turns[joins] as number;
        }
      }
      const leaves = gate - REACH - 1;
      if (leaves >= 0 && (square[leaves] as number) >= 0) {
        sum -= square[leaves] as number;
        pairs--;
      }
      const unspun = gate - REACH;
      if (unspun >= 0 && (turns[unspun] as number) >= 0) {
        inner--;
        changes -= turns[unspun] as number;
      }
      if (gate < 0 || pairs < ENOUGH_PAIRS) continue;
      rough[start + gate] =
        (sum > SUSPECT_TEXTURE_DB2 * pairs ? ROUGH : 0) |
        (inner > 0 && 100 * changes > SUSPECT_SPIN_PERCENT * inner ? SPINNING : 0);
    }
  }
  return rough;
}

/** Weak: rough and spinning, which the edges of showers seldom are at once. */
export function screenTexture({ echo }: SweepView, rough: Uint8Array, { weak }: Evidence): void {
  const bit = screenBit("texture");
  const { measuredDbz } = echo;
  for (let at = 0; at < rough.length; at++) {
    if (rough[at] === (ROUGH | SPINNING) && (measuredDbz[at] as number) > Number.NEGATIVE_INFINITY) {
      weak[at] = (weak[at] as number) | bit;
    }
  }
}
