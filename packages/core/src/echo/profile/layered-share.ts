import type { MeltingCorrelation } from "./learned-profile.ts";

/** Scatter of RHOHV in rain about its mean, one standard deviation; common practice for some 60 pulses. */
const CORRELATION_NOISE = 0.01;
/** How far the rain type alone leaves open whether a gate shares the profile (share from 0 to 1); house rule. */
const TYPE_NOISE = 0.5;
/** Gates on either side along the ray whose RHOHV speaks for a gate too. */
const NEIGHBOURS = 2;

/**
 * Share of the rain of one ray's gates that has the stratiform profile, 0 to 1: what the rain type says, corrected by
 * how much RHOHV has fallen over how much it would if all of it had, each by its own certainty.
 *
 * @param share - shape [gateCount]: by rain type on entry, corrected on return
 * @param meltingShare - shape [gateCount]: share of the beam in the layer
 * @param rayStart - index in `rhohv` of the ray's first gate
 * @param firstGate - nearer gates are left alone
 */
export function correctShareByRhohv(
  share: Float64Array,
  rhohv: Float32Array,
  rayStart: number,
  firstGate: number,
  meltingShare: Float64Array,
  { inRain, drop }: MeltingCorrelation,
): void {
  const gateCount = share.length;
  const typeCertainty = 1 / (TYPE_NOISE * TYPE_NOISE);
  const noise2 = CORRELATION_NOISE * CORRELATION_NOISE;
  // Sums over the gates around, moved along the ray: one gate comes in ahead, one drops out behind.
  let fallen = 0;
  let expected = 0;
  let count = 0;
  const from = Math.max(0, firstGate - NEIGHBOURS);
  for (let ahead = from; ahead < gateCount + NEIGHBOURS; ahead++) {
    const rho = ahead < gateCount ? (rhohv[rayStart + ahead] as number) : Number.NaN;
    // NaN compares false.
    if (rho > 0) {
      fallen += inRain - rho;
      expected += drop * (meltingShare[ahead] as number);
      count++;
    }
    const behind = ahead - 2 * NEIGHBOURS - 1;
    const rhoBehind = behind >= from ? (rhohv[rayStart + behind] as number) : Number.NaN;
    if (rhoBehind > 0) {
      fallen -= inRain - rhoBehind;
      expected -= drop * (meltingShare[behind] as number);
      count--;
    }
    const gate = ahead - NEIGHBOURS;
    if (gate < firstGate || count === 0 || expected < LEAST_EXPECTED) continue;
    const byRho = Math.min(1, Math.max(0, fallen / expected));
    const certainty = (expected * expected) / (count * noise2);
    share[gate] = (certainty * byRho + typeCertainty * (share[gate] as number)) / (certainty + typeCertainty);
  }
}

/** A fall of RHOHV that nobody could see, summed over the neighbours. */
const LEAST_EXPECTED = 1e-3;
