/** Windows that KDP may be taken over. House rule within the customary 2 to 6 km. */
export interface KdpSettings {
  readonly shortestKm: number;
  readonly longestKm: number;
  /** Noise of KDP, deg/km, that is good enough in heavy rain, and most that is given out. */
  readonly goodNoiseDegPerKm: number;
  readonly mostNoiseDegPerKm: number;
}

export const DEFAULT_KDP_SETTINGS: KdpSettings = {
  shortestKm: 2,
  longestKm: 6,
  goodNoiseDegPerKm: 0.3,
  mostNoiseDegPerKm: 1,
};

/** Echo of heavy rain, from which on short windows may be taken (as Wang and Chandrasekar, 2009, adapt to gradients). */
const HEAVY_DBZ = 40;

/** Radians in a degree of phase: what KDP in rad/km is to KDP in deg/km. */
export const RAD_PER_DEG = Math.PI / 180;

const SUMS = 5;

/** Slopes of phase along rays by least squares over windows, from running sums. */
export class SlopeOfPhase {
  /** Of all gates before one: how many, places, their squares, phases, products; one after another. */
  readonly #sums: Float64Array;
  readonly #gateCount: number;

  constructor(gateCount: number) {
    this.#gateCount = gateCount;
    this.#sums = new Float64Array(SUMS * (gateCount + 1));
  }

  /** Takes a ray in: gates that are NaN do not count. */
  load(phaseDeg: Float64Array): void {
    const sums = this.#sums;
    let n = 0;
    let x = 0;
    let xx = 0;
    let y = 0;
    let xy = 0;
    for (let gate = 0; gate < this.#gateCount; gate++) {
      const value = phaseDeg[gate] as number;
      if (!Number.isNaN(value)) {
        n++;
        x += gate;
        xx += gate * gate;
        y += value;
        xy += gate * value;
      }
      const to = SUMS * (gate + 1);
      sums[to] = n;
      sums[to + 1] = x;
      sums[to + 2] = xx;
      sums[to + 3] = y;
      sums[to + 4] = xy;
    }
  }

  /** Half of the slope in degrees per gate, over gates within `half` of one. Read `variance` after it. */
  kdpPerGate(gate: number, half: number): number {
    const sums = this.#sums;
    const from = SUMS * Math.max(0, gate - half);
    const to = SUMS * Math.min(this.#gateCount, gate + half + 1);
    const n = (sums[to] as number) - (sums[from] as number);
    const share = 1 / n;
    const x = (sums[to + 1] as number) - (sums[from + 1] as number);
    const xx = (sums[to + 2] as number) - (sums[from + 2] as number) - x * x * share;
    // Fewer than half of the window's gates do not stand for it.
    if (n < 3 || n < half + 1 || !(xx > 0)) {
      this.variance = Number.POSITIVE_INFINITY;
      return Number.NaN;
    }
    const y = (sums[to + 3] as number) - (sums[from + 3] as number);
    const xy = (sums[to + 4] as number) - (sums[from + 4] as number) - x * y * share;
    const half2 = 0.5 / xx;
    this.variance = 0.5 * half2;
    return half2 * xy;
  }

  /** Variance of the last KDP per gate, in units of that of one gate's phase. */
  variance = Number.POSITIVE_INFINITY;
}

/**
 * KDP of one ray, one way: half of the slope of PHIDP. Heavy echo takes the shortest window whose noise is good
 * enough, other echo the longest. A negative slope keeps its sign.
 *
 * @param slopes - with the ray loaded: unfolded phase, not forced to rise
 * @param dbz - of the sweep; gates without echo get NaN
 * @param from - the ray's first gate in `dbz` and `out`
 */
export function kdpOfRay(
  slopes: SlopeOfPhase,
  dbz: Float32Array,
  from: number,
  out: Float32Array,
  gateCount: number,
  gateKm: number,
  noiseDeg: number,
  settings: KdpSettings,
): void {
  const shortest = Math.max(1, Math.round(settings.shortestKm / gateKm / 2));
  const longest = Math.max(shortest, Math.round(settings.longestKm / gateKm / 2));
  const middle = Math.round((shortest + longest) / 2);
  const noise2 = (noiseDeg / gateKm) ** 2;
  const good2 = settings.goodNoiseDegPerKm ** 2;
  const most2 = settings.mostNoiseDegPerKm ** 2;
  for (let gate = 0; gate < gateCount; gate++) {
    const echo = dbz[from + gate] as number;
    out[from + gate] = Number.NaN;
    if (!(echo > Number.NEGATIVE_INFINITY)) continue;
    let kdp = Number.NaN;
    if (echo >= HEAVY_DBZ) {
      kdp = slopes.kdpPerGate(gate, shortest);
      if (slopes.variance * noise2 > good2) kdp = slopes.kdpPerGate(gate, middle);
      if (slopes.variance * noise2 > good2) kdp = slopes.kdpPerGate(gate, longest);
    } else kdp = slopes.kdpPerGate(gate, longest);
    if (slopes.variance * noise2 <= most2) out[from + gate] = kdp / gateKm;
  }
}
