import type { PolarEcho } from "../polar-echo.ts";

/** Which gates may speak for PHIDP, and how noisy it is. House rules, all of them. */
export interface PhaseSettings {
  /** PHIDP repeats itself after so many degrees: 360, or 180 where polarisations alternate. */
  readonly foldDeg: 360 | 180;
  /** Gates that correlate less carry no phase of rain: clutter, biology, noise. */
  readonly leastCorrelation: number;
  /** Weaker echo has too noisy a phase. */
  readonly leastDbz: number;
  /** Noise of one gate from which on a sweep's phase is given up. */
  readonly mostNoiseDeg: number;
  /** Rays with rain that a sweep must have for a system phase of its own. */
  readonly leastRays: number;
}

export const DEFAULT_PHASE_SETTINGS: PhaseSettings = {
  foldDeg: 360,
  leastCorrelation: 0.85,
  leastDbz: 5,
  mostNoiseDeg: 20,
  leastRays: 10,
};

/** Puts an angle into -fold/2 to fold/2. */
export function folded(angleDeg: number, foldDeg: number): number {
  return angleDeg - foldDeg * Math.round(angleDeg / foldDeg);
}

/**
 * 1 where a gate's phase may be rain's: measured, echo strong enough, well correlated, not screened.
 *
 * @returns shape [rayCount * gateCount], and how many they are
 */
export function phaseGates(
  echo: PolarEcho,
  phidpDeg: Float32Array,
  settings: PhaseSettings,
): { readonly good: Uint8Array; readonly count: number } {
  const { measuredDbz, screenedBy, rhohv } = echo;
  const { leastCorrelation, leastDbz } = settings;
  const good = new Uint8Array(phidpDeg.length);
  let count = 0;
  for (let gate = 0; gate < phidpDeg.length; gate++) {
    // Comparisons with NaN are false: a gate that is not observed is never good.
    if (!((measuredDbz[gate] as number) >= leastDbz) || screenedBy[gate] !== 0) continue;
    if (rhohv !== undefined && !((rhohv[gate] as number) >= leastCorrelation)) continue;
    if (Number.isNaN(phidpDeg[gate] as number)) continue;
    good[gate] = 1;
    count++;
  }
  return { good, count };
}

const NOISE_BIN_DEG = 0.5;
/** Median of the absolute value of a normal number, in standard deviations. */
const MEDIAN_ABSOLUTE = 0.6745;

/**
 * Noise of one gate's phase: from how far a good gate lies off the middle of its two good neighbours, which a
 * steady rise leaves alone. The median over the sweep, so that folds and clutter do not count.
 *
 * @returns standard deviation in degrees; NaN where no three good gates stand together
 */
export function phaseNoiseDeg(
  phidpDeg: Float32Array,
  good: Uint8Array,
  gateCount: number,
  foldDeg: number,
): number {
  const counts = new Uint32Array(Math.ceil(foldDeg / NOISE_BIN_DEG) + 1);
  let total = 0;
  for (let gate = 1; gate < phidpDeg.length - 1; gate++) {
    if ((good[gate - 1] as number) + (good[gate] as number) + (good[gate + 1] as number) !== 3) continue;
    const place = gate % gateCount;
    if (place === 0 || place === gateCount - 1) continue;
    const before = folded((phidpDeg[gate] as number) - (phidpDeg[gate - 1] as number), foldDeg);
    const after = folded((phidpDeg[gate + 1] as number) - (phidpDeg[gate] as number), foldDeg);
    const bin = Math.round(Math.abs(after - before) / NOISE_BIN_DEG);
    counts[bin] = (counts[bin] as number) + 1;
    total++;
  }
  if (total === 0) return Number.NaN;
  let below = 0;
  let bin = 0;
  while (below + (counts[bin] as number) < total / 2) below += counts[bin++] as number;
  // Within the bin the values are spread evenly.
  const into = (total / 2 - below) / (counts[bin] as number) - 0.5;
  return (Math.max(0, bin + into) * NOISE_BIN_DEG) / (MEDIAN_ABSOLUTE * Math.sqrt(6));
}
