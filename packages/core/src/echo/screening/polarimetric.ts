import { screenBit } from "../polar-echo.ts";
import type { Evidence } from "./evidence.ts";
import type { SweepView } from "./sweep-view.ts";

/** Noise spoils correlation and phase of echo less than this above it. House rule. */
const CLEAR_OF_NOISE_DB = 6;
/** Weather seldom correlates worse than this, even melting snow and hail. Common practice: 0.8 to 0.85. */
const WEAK_RHOHV = 0.85;
/** No weather does. House rule, below what is reported of melting layers. */
const STRONG_RHOHV = 0.75;

/**
 * RHOHV: ground, blades and foreign pulses correlate badly, hydrometeors well.
 *
 * Source: Zrnic and Ryzhkov (1999), Bull. Amer. Meteor. Soc. 80, 389-406; thresholds as above.
 */
export function screenLowCorrelation(view: SweepView, { strong, weak }: Evidence): void {
  const bit = screenBit("low-correlation");
  const { echo, rayCount, gateCount, rangeGainDb, noiseAt1KmDbz, echoAt, echoStart } = view;
  const rhohv = echo.rhohv as Float32Array;
  for (let ray = 0; ray < rayCount; ray++) {
    for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k++) {
      const at = echoAt[k] as number;
      const rho = rhohv[at] as number;
      if (!(rho < WEAK_RHOHV)) continue;
      const gate = at - ray * gateCount;
      const aboveDb = (echo.measuredDbz[at] as number) - (rangeGainDb[gate] as number) - noiseAt1KmDbz;
      if (!(aboveDb >= CLEAR_OF_NOISE_DB)) continue;
      if (rho < STRONG_RHOHV) strong[at] = (strong[at] as number) | bit;
      else weak[at] = (weak[at] as number) | bit;
    }
  }
}

/** Phase that a gate may be off its neighbours along the ray, degrees. House rule; rain scatters by 2 to 5. */
const WEAK_PHASE_DEG = 15;
const STRONG_PHASE_DEG = 45;

/**
 * PHIDP: in rain it changes slowly along a ray, in ground echo it is anything.
 *
 * A gate counts as noisy by the second smallest of its differences from the two gates to either side, so that one
 * wild gate does not cost its neighbours, as a window's standard deviation would (house rule).
 *
 * Source of the principle: Zrnic and Ryzhkov (1999), Bull. Amer. Meteor. Soc. 80, 389-406.
 */
export function screenNoisyPhase(view: SweepView, { strong, weak }: Evidence): void {
  const bit = screenBit("noisy-phase");
  const { echo, rayCount, gateCount, rangeGainDb, noiseAt1KmDbz, echoAt, echoStart } = view;
  const phase = echo.phidpDeg as Float32Array;
  for (let ray = 0; ray < rayCount; ray++) {
    for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k++) {
      const at = echoAt[k] as number;
      const here = phase[at] as number;
      const toBefore = here - (phase[at - 1] as number);
      const toAfter = here - (phase[at + 1] as number);
      // Nearly every gate of rain ends here.
      if (
        toBefore < WEAK_PHASE_DEG &&
        toBefore > -WEAK_PHASE_DEG &&
        toAfter < WEAK_PHASE_DEG &&
        toAfter > -WEAK_PHASE_DEG
      ) {
        continue;
      }
      const gate = at - ray * gateCount;
      if (gate < 2 || gate + 2 >= gateCount) continue;
      const deg = secondSmallest(
        phaseApartDeg(here, phase[at - 1] as number),
        phaseApartDeg(here, phase[at + 1] as number),
        phaseApartDeg(here, phase[at - 2] as number),
        phaseApartDeg(here, phase[at + 2] as number),
      );
      if (!(deg >= WEAK_PHASE_DEG)) continue;
      const aboveDb = (echo.measuredDbz[at] as number) - (rangeGainDb[gate] as number) - noiseAt1KmDbz;
      if (!(aboveDb >= CLEAR_OF_NOISE_DB)) continue;
      if (deg >= STRONG_PHASE_DEG) strong[at] = (strong[at] as number) | bit;
      else weak[at] = (weak[at] as number) | bit;
    }
  }
}

/** Difference of two phases on the circle, 0 to 180; NaN where one is missing. */
function phaseApartDeg(a: number, b: number): number {
  let apart = a > b ? a - b : b - a;
  if (apart > 180) {
    apart %= 360;
    if (apart > 180) apart = 360 - apart;
  }
  return apart;
}

/** Of four numbers; NaN where any is, as a gate beside missing ones tells nothing. */
function secondSmallest(a: number, b: number, c: number, d: number): number {
  const lowA = Math.min(a, b);
  const lowB = Math.min(c, d);
  return lowA < lowB ? Math.min(Math.max(a, b), lowB) : Math.min(Math.max(c, d), lowA);
}

/** Insects and birds: weak, long in the horizontal, badly correlated. Common practice for the three; house rule in sum. */
const CLEAR_AIR = { belowDbz: 20, aboveZdrDb: 2.5, belowRhohv: 0.9, belowHeightM: 3000 } as const;

/**
 * Strong, since it asks for four things at once: weak echo near the ground with high ZDR and low RHOHV.
 *
 * Source: Zrnic and Ryzhkov (1998), IEEE Trans. Geosci. Remote Sens. 36, 661-668.
 */
export function screenClearAir(view: SweepView, { strong }: Evidence): void {
  const bit = screenBit("clear-air");
  const { echo, rayCount, gateCount, heightM, rangeGainDb, noiseAt1KmDbz, echoAt, echoStart } = view;
  const rhohv = echo.rhohv as Float32Array;
  const zdr = echo.zdrDb as Float32Array;
  for (let ray = 0; ray < rayCount; ray++) {
    for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k++) {
      const at = echoAt[k] as number;
      if (!((rhohv[at] as number) < CLEAR_AIR.belowRhohv)) continue;
      const dbz = echo.measuredDbz[at] as number;
      if (!(dbz < CLEAR_AIR.belowDbz)) continue;
      const gate = at - ray * gateCount;
      if (!((zdr[at] as number) > CLEAR_AIR.aboveZdrDb && (heightM[gate] as number) < CLEAR_AIR.belowHeightM))
        continue;
      if (dbz >= (rangeGainDb[gate] as number) + noiseAt1KmDbz + CLEAR_OF_NOISE_DB) {
        strong[at] = (strong[at] as number) | bit;
      }
    }
  }
}
