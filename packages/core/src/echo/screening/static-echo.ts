import { type PolarEcho, screenBit } from "../polar-echo.ts";
import type { Evidence } from "./evidence.ts";
import { geometryOf, isSameGeometry, type SweepGeometry, slotOf } from "./sweep-geometry.ts";
import type { SweepView } from "./sweep-view.ts";

/** Gates that hold echo of the ground, and how strong it gets. */
export interface FixedEcho {
  /** Ascending: slot * gateCount + gate, where rays are told apart by slot. */
  readonly places: Int32Array;
  /** Shape of `places`: echo up to this is taken for what stands there. */
  readonly upToDbz: Float32Array;
  /** Shape of `places`: share of the rounds that can tell in which it showed, 0.5 to 1. */
  readonly share: Float64Array;
}

/** Echo that stays in place, learned over the run for one elevation and geometry. */
export interface LearnedSweep extends SweepGeometry {
  /** Rounds that it was learned from. */
  readonly rounds: number;
  readonly static: FixedEcho;
  /** Strong points such as wind turbines. */
  readonly points: FixedEcho;
}

/** Plain numbers and arrays: may be cloned and stored. */
export interface LearnedStaticEcho {
  readonly sweeps: readonly LearnedSweep[];
}

/** What was learned of sweeps like this one; undefined where nothing was. */
export function learnedFor(
  echo: PolarEcho,
  learned: LearnedStaticEcho | undefined,
): LearnedSweep | undefined {
  if (learned === undefined) return undefined;
  const geometry = geometryOf(echo.header, echo.azimuthDeg.length);
  return learned.sweeps.find((sweep) => isSameGeometry(sweep, geometry));
}

/** Strong: echo no stronger than what was learned to stand there. Rain well above it stays. */
export function screenLearned(
  { echo, rayCount, gateCount }: SweepView,
  { slotCount }: LearnedSweep,
  { places, upToDbz }: FixedEcho,
  screen: "static-echo" | "fixed-point",
  { strong }: Evidence,
): void {
  const bit = screenBit(screen);
  for (let ray = 0; ray < rayCount; ray++) {
    const from = slotOf(echo.azimuthDeg[ray] as number, slotCount) * gateCount;
    const shift = ray * gateCount - from;
    for (let k = firstNotBelow(places, from); k < places.length; k++) {
      const place = places[k] as number;
      if (place >= from + gateCount) break;
      const dbz = echo.measuredDbz[place + shift] as number;
      if (dbz <= (upToDbz[k] as number) && dbz > Number.NEGATIVE_INFINITY) {
        strong[place + shift] = (strong[place + shift] as number) | bit;
      }
    }
  }
}

/** Index of the first number of an ascending list that is not below a value. */
function firstNotBelow(ascending: Int32Array, value: number): number {
  let low = 0;
  let high = ascending.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if ((ascending[middle] as number) < value) low = middle + 1;
    else high = middle;
  }
  return low;
}
