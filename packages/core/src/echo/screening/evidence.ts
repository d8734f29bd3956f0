import { type Screen, screenBit } from "../polar-echo.ts";
import type { SweepView } from "./sweep-view.ts";

/**
 * What the screens hold against each gate.
 *
 * Strong evidence takes a gate alone. Weak evidence, such as rough echo, which the edge of a shower shows
 * too, takes a gate only where a second and independent screen agrees. House rule.
 */
export interface Evidence {
  /** Shape [gates]: bits by `screenBit`. */
  readonly strong: Uint16Array;
  readonly weak: Uint16Array;
}

/** Screens that look at the same thing do not support one another. */
const ROUGHNESS = screenBit("still-echo") | screenBit("texture");

/**
 * Weather correlates this well, melting snow and hail for the most part too; clutter, turbines and interference
 * seldom do. Such a gate is cleared of what speaks against it by strength, place and roughness alone.
 * Common practice takes 0.9 to 0.97.
 */
const WEATHER_LIKE_RHOHV = 0.9;

/** What a weather-like correlation clears a gate of. */
const CLEARED = bitsOf([
  "static-echo",
  "still-echo",
  "filtered-power",
  "noisy-phase",
  "texture",
  "vertical-gradient",
  "fixed-point",
]);

function bitsOf(screens: readonly Screen[]): number {
  return screens.reduce((bits, screen) => bits | screenBit(screen), 0);
}

/** Weighs the evidence of every gate and writes what holds into `screenedBy`. */
export function weighEvidence({ echo, echoAt }: SweepView, { strong, weak }: Evidence): void {
  const { screenedBy, rhohv } = echo;
  for (let k = 0; k < echoAt.length; k++) {
    const at = echoAt[k] as number;
    let alone = strong[at] as number;
    let supporting = weak[at] as number;
    if ((alone | supporting) === 0) continue;
    if (rhohv !== undefined && (rhohv[at] as number) >= WEATHER_LIKE_RHOHV) {
      alone &= ~CLEARED;
      supporting &= ~CLEARED;
    }
    if (alone !== 0 || isDouble(supporting)) screenedBy[at] = alone | supporting;
  }
}

/** True where two independent screens agree. */
function isDouble(bits: number): boolean {
  const one = (bits & ROUGHNESS) === 0 ? bits : (bits & ~ROUGHNESS) | screenBit("texture");
  return (one & (one - 1)) !== 0;
}
