import type { PolarEcho } from "../polar-echo.ts";

/** Which gates may speak for PHIDP, and how noisy it is. House rules, all of them. */
export interface PhaseSettings {
  /** PHIDP repeats itself after so many degrees: 360, or 180 where polarisations alternate. */
  readonly foldDeg: 360 | 180;
  /** Gates that correlate less carry no phase of rain: clutter, biology, noise. */
  readonly leastCorrelation: number;
  /** Where the file has no RHOHV, weaker echo has too noisy a phase; else RHOHV itself tells noise. */
  readonly leastDbz: number;
  /** Noise of one gate from which on a sweep's phase is given up. */
  readonly mostNoiseDeg: number;
  /** Rays with rain that a sweep must have for a system phase of its own. */
  readonly leastRays: number;
}

export const DEFAULT_PHASE_SETTINGS: PhaseSettings = {
  foldDeg: 360,
  leastCorrelation: 0.85,
  leastDbz: 10,
  mostNoiseDeg: 20,
  leastRays: 10,
};

/** Puts an angle into -fold/2 to fold/2. */
export function folded(angleDeg: number, foldDeg: number): number {
  const half = foldDeg / 2;
  if (angleDeg >= -half && angleDeg <= half) return angleDeg;
  return angleDeg - foldDeg * Math.round(angleDeg / foldDeg);
}

/**
 * 1 where a gate's phase may be rain's: measured, with echo, well correlated, not screened.
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
  // Comparisons with NaN are false: what is not observed, and a phase that is not a number, is never good.
  for (let gate = 0; gate < phidpDeg.length; gate++) {
    if (screenedBy[gate] !== 0 || !((measuredDbz[gate] as number) > Number.NEGATIVE_INFINITY)) continue;
    const trusted =
      rhohv === undefined
        ? (measuredDbz[gate] as number) >= leastDbz
        : (rhohv[gate] as number) >= leastCorrelation;
    if (!trusted || Number.isNaN(phidpDeg[gate] as number)) continue;
    good[gate] = 1;
    count++;
  }
  return { good, count };
}

const NOISE_BIN_DEG = 0.5;
/** A median needs no more rays than about these, spread over the sweep. */
const NOISE_RAYS = 90;
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
  const rayCount = phidpDeg.length / gateCount;
  const stride = Math.max(1, Math.floor(rayCount / NOISE_RAYS));
  let total = 0;
  for (let ray = 0; ray < rayCount; ray += stride) {
    const end = (ray + 1) * gateCount - 1;
    for (let gate = ray * gateCount + 1; gate < end; gate++) {
      if ((good[gate - 1] as number) + (good[gate] as number) + (good[gate + 1] as number) !== 3) continue;
      const before = folded((phidpDeg[gate] as number) - (phidpDeg[gate - 1] as number), foldDeg);
      const after = folded((phidpDeg[gate + 1] as number) - (phidpDeg[gate] as number), foldDeg);
      const bin = Math.round(Math.abs(after - before) / NOISE_BIN_DEG);
      counts[bin] = (counts[bin] as number) + 1;
      total++;
    }
  }
  if (total === 0) return Number.NaN;
  let below = 0;
  let bin = 0;
  while (below + (counts[bin] as number) < total / 2) below += counts[bin++] as number;
  // Within the bin the values are spread evenly.
  const into = (total / 2 - below) / (counts[bin] as number) - 0.5;
  return (Math.max(0, bin + into) * NOISE_BIN_DEG) / (MEDIAN_ABSOLUTE * Math.sqrt(6));
}
