import { screenBit } from "../polar-echo.ts";
import type { Evidence } from "./evidence.ts";
import type { SweepView } from "./sweep-view.ts";
import { ROUGH } from "./texture.ts";

/** Ground echo stays below these. Common practice: 1 m/s (0.5 to 1.5) each. */
export const STILL_VELOCITY_M_PER_S = 1;
export const STILL_WIDTH_M_PER_S = 1;

/**
 * Weak: near-zero velocity, a narrow spectrum where it is given, and rough echo. Rain whose wind blows across
 * the beam stands still too, and so does a slow shower, but its echo is smooth.
 *
 * Source: Hubbert, Dixon and Ellis (2009), J. Atmos. Oceanic Technol. 26, 1181-1197; thresholds common practice.
 */
export function screenStillEcho({ echo }: SweepView, rough: Uint8Array, { weak }: Evidence): void {
  const bit = screenBit("still-echo");
  const velocity = echo.velocityMPerS as Float32Array;
  const width = echo.spectrumWidthMPerS;
  for (let at = 0; at < rough.length; at++) {
    if (((rough[at] as number) & ROUGH) === 0) continue;
    const speed = velocity[at] as number;
    if (!(speed > -STILL_VELOCITY_M_PER_S && speed < STILL_VELOCITY_M_PER_S)) continue;
    if (width !== undefined && (width[at] as number) > STILL_WIDTH_M_PER_S) continue;
    if ((echo.measuredDbz[at] as number) > Number.NEGATIVE_INFINITY) weak[at] = (weak[at] as number) | bit;
  }
}
