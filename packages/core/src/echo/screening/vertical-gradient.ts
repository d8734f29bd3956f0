import { beamHeightM, effectiveRadiusM } from "../../beam.ts";
import { type MeasuredEcho, screenBit } from "../polar-echo.ts";
import type { Evidence } from "./evidence.ts";
import { nearestRay, type SweepView } from "./sweep-view.ts";

/** Weather rarely loses more than 10 to 20 dB from the lowest sweep to the next (common practice). */
const WEAK_DROP_DB = 15;
/** House rule: what no weather is known to lose over the height that is allowed here. */
const STRONG_DROP_DB = 25;
/** Above these the next beam may pass over shallow rain, or lie in the ice above the melting layer. House rules. */
const HIGHEST_UPPER_BEAM_M = 2000;
const WIDEST_GAP_M = 1000;
/** Weaker echo is not judged: little rain, and soon gone above. House rule. */
const LEAST_DBZ = 5;

/**
 * Echo that is gone in the sweep above: ground echo and echo bent down to the ground, not rain.
 *
 * The strongest of the nine gates above and beside speaks, as rain leans and drifts between two sweeps.
 *
 * Source: Steiner and Smith (2002), J. Atmos. Oceanic Technol. 19, 673-686.
 *
 * @param above - the raw sweep above; other rays and gates are allowed
 * @returns false where no gate of the sweep above lies close enough to judge by
 */
export function screenVerticalGradient(
  view: SweepView,
  above: MeasuredEcho,
  { strong, weak }: Evidence,
): boolean {
  const bit = screenBit("vertical-gradient");
  const { echo, rayCount, gateCount, rangeGainDb, noiseAt1KmDbz, echoAt, echoStart } = view;
  const gatesAbove = gatesOver(view, above);
  let judged = 0;
  while (judged < gateCount && (gatesAbove[judged] as number) >= 0) judged++;
  if (judged === 0) return false;
  const { measuredDbz: dbzAbove, azimuthDeg } = above;
  const countAbove = above.header.gateCount;
  const raysAbove = azimuthDeg.length;
  const apartDeg = Math.max(view.rayStepDeg, 360 / Math.max(1, raysAbove));
  let any = false;
  for (let ray = 0; ray < rayCount; ray++) {
    const over = nearestRay(azimuthDeg, echo.azimuthDeg[ray] as number, apartDeg);
    if (over < 0) continue;
    any = true;
    const left = (over + raysAbove - 1) % raysAbove;
    const right = (over + 1) % raysAbove;
    for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k++) {
      const at = echoAt[k] as number;
      const gate = at - ray * gateCount;
      if (gate >= judged) break;
      const dbz = echo.measuredDbz[at] as number;
      if (!(dbz >= LEAST_DBZ)) continue;
      const gateAbove = gatesAbove[gate] as number;
      const straight = dbzAbove[over * countAbove + gateAbove] as number;
      // Not observed above: nothing can be said.
      if (!(dbz - straight >= WEAK_DROP_DB)) continue;
      const first = Math.max(0, gateAbove - 1);
      const last = Math.min(countAbove - 1, gateAbove + 1);
      // What is below detection above may be as strong as the noise.
      let strongest = noiseAt1KmDbz + (rangeGainDb[gate] as number);
      for (let other = first; other <= last; other++) {
        const a = dbzAbove[left * countAbove + other] as number;
        const b = dbzAbove[over * countAbove + other] as number;
        const c = dbzAbove[right * countAbove + other] as number;
        if (a > strongest) strongest = a;
        if (b > strongest) strongest = b;
        if (c > strongest) strongest = c;
      }
      const dropDb = dbz - strongest;
      if (dropDb >= STRONG_DROP_DB) strong[at] = (strong[at] as number) | bit;
      else if (dropDb >= WEAK_DROP_DB) weak[at] = (weak[at] as number) | bit;
    }
  }
  return any;
}

/** Of each gate the one above it; -1 from where on none is close enough. */
function gatesOver({ gateCount, heightM, echo }: SweepView, above: MeasuredEcho): Int32Array {
  const over = new Int32Array(gateCount).fill(-1);
  const { firstGateCentreM, gateLengthM, elevationDeg, gateCount: countAbove } = above.header;
  if (!(elevationDeg > echo.header.elevationDeg)) return over;
  const radiusM = effectiveRadiusM();
  for (let gate = 0; gate < gateCount; gate++) {
    const rangeM = Math.max(0, echo.header.firstGateCentreM + gate * echo.header.gateLengthM);
    const gateAbove = Math.round((rangeM - firstGateCentreM) / gateLengthM);
    const upperM = beamHeightM(rangeM, elevationDeg, radiusM);
    if (gateAbove >= countAbove || upperM > HIGHEST_UPPER_BEAM_M) break;
    if (upperM - (heightM[gate] as number) > WIDEST_GAP_M) break;
    over[gate] = Math.max(0, gateAbove);
  }
  return over;
}
