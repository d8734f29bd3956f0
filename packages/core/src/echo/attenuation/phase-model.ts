/** Echo that is looked at: 25 to 48 dBZ by 1 dB. Less has no KDP to speak of, more may hold hail. */
export const Z_LOW_DBZ = 25;
export const Z_BINS = 23;
export const PHASE_BINS = 100;

/** KDP = exp(level) exp(slope (Z - 38 dBZ + alpha PHIDP)). */
export interface PhaseModel {
  readonly alphaDbPerDeg: number;
  /** Natural logarithm of KDP per dB of Z: 0.23 times the exponent of Z. */
  readonly slopePerDb: number;
}

const MIDDLE_DBZ = 38;
/** Scatter of KDP at given Z, as a share of it. House rule; it only weighs the bins. */
const KDP_SCATTER = 1;
const MOST_TURNS = 50;
/** Slopes that rain shows, in exponents of Z about 0.75: outside them the fit has gone astray. */
const LEAST_SLOPE = 0.05;
const MOST_SLOPE = 0.35;

/**
 * Fits the mean KDP of rain over bins of measured Z and phase: a generalised linear model with logarithmic link,
 * by iterated weighted least squares.
 *
 * Source: McCullagh and Nelder (1989), Generalized Linear Models, section 2.5.
 *
 * @param counts - shape [Z_BINS * PHASE_BINS], pairs of gates by bin
 * @param sums - sum of their KDP, in units of 1/perDeg deg/km
 * @param noise2 - variance of one pair's KDP without rain, (deg/km)^2
 * @returns undefined where it does not settle, or on a slope that rain does not show
 */
export function fitPhaseModel(
  counts: ArrayLike<number>,
  sums: ArrayLike<number>,
  perDeg: number,
  phaseStepDeg: number,
  noise2: number,
): PhaseModel | undefined {
  let level = Math.log(0.3);
  let slope = 0.17;
  let alongPhase = 0;
  for (let turn = 0; turn < MOST_TURNS; turn++) {
    const a = new Float64Array(6);
    const r = new Float64Array(3);
    for (let bin = 0; bin < counts.length; bin++) {
      const n = counts[bin] as number;
      if (n <= 0) continue;
      const z = Z_LOW_DBZ + Math.floor(bin / PHASE_BINS) + 0.5 - MIDDLE_DBZ;
      const phase = ((bin % PHASE_BINS) + 0.5) * phaseStepDeg;
      const linear = Math.max(-12, Math.min(5, level + slope * z + alongPhase * phase));
      const mean = Math.exp(linear);
      const off = Math.max(-20, Math.min(20, ((sums[bin] as number) / (n * perDeg) - mean) / mean));
      const weight = (n * mean * mean) / (noise2 + (KDP_SCATTER * mean) ** 2);
      a[0] = (a[0] as number) + weight;
      a[1] = (a[1] as number) + weight * z;
      a[2] = (a[2] as number) + weight * phase;
      a[3] = (a[3] as number) + weight * z * z;
      a[4] = (a[4] as number) + weight * z * phase;
      a[5] = (a[5] as number) + weight * phase * phase;
      r[0] = (r[0] as number) + weight * off;
      r[1] = (r[1] as number) + weight * off * z;
      r[2] = (r[2] as number) + weight * off * phase;
    }
    const step = solveSymmetric3(a, r);
    if (step === undefined) return undefined;
    level += Math.max(-1, Math.min(1, step[0]));
    slope += Math.max(-0.1, Math.min(0.1, step[1]));
    alongPhase += Math.max(-0.1, Math.min(0.1, step[2]));
    if (Math.abs(step[0]) < 1e-9 && Math.abs(step[1]) < 1e-10 && Math.abs(step[2]) < 1e-10) {
      return slope > LEAST_SLOPE && slope < MOST_SLOPE
        ? { alphaDbPerDeg: alongPhase / slope, slopePerDb: slope }
        : undefined;
    }
  }
  return undefined;
}

/** Solves three equations by Cholesky's way; the matrix as its upper triangle, row by row. */
function solveSymmetric3(a: Float64Array, r: Float64Array): readonly [number, number, number] | undefined {
  const [a00, a01, a02, a11, a12, a22] = a as unknown as [number, number, number, number, number, number];
  const [r0, r1, r2] = r as unknown as [number, number, number];
  const l10 = a01 / a00;
  const l20 = a02 / a00;
  const d1 = a11 - l10 * a01;
  const l21 = (a12 - l20 * a01) / d1;
  const d2 = a22 - l20 * a02 - l21 * l21 * d1;
  // A pivot that has lost all its digits: phase, or Z, does not vary.
  if (!(a00 > 0 && d1 > 1e-9 * a11 && d2 > 1e-9 * a22)) return undefined;
  const y1 = r1 - l10 * r0;
  const y2 = r2 - l20 * r0 - l21 * y1;
  const x2 = y2 / d2;
  const x1 = y1 / d1 - l21 * x2;
  return [r0 / a00 - l10 * x1 - l20 * x2, x1, x2];
}
