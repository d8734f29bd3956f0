import { screenBit } from "../polar-echo.ts";
import { rayBeside, type SweepView } from "./sweep-view.ts";

/** A gate with fewer echoing neighbours than this, of eight, is speckle. House rule. */
const ENOUGH_NEIGHBOURS = 2;

/**
 * What the other screens left standing alone: echo with at most one echoing neighbour of eight.
 *
 * Beside gates that are not observed nothing is judged. Common practice; the number is a house rule.
 */
export function screenSpeckle(view: SweepView): void {
  const { echo, rayCount, gateCount } = view;
  const { measuredDbz, screenedBy } = echo;
  const bit = screenBit("speckle");
  // Of each gate: 1 echo that stands, 9 not observed, 0 else; beyond an end of a ray nothing is.
  const kind = new Uint8Array(measuredDbz.length);
  for (let at = 0; at < kind.length; at++) {
    const dbz = measuredDbz[at] as number;
    kind[at] = dbz > Number.NEGATIVE_INFINITY ? (screenedBy[at] === 0 ? 1 : 0) : Number.isNaN(dbz) ? 9 : 0;
  }
  for (let ray = 0; ray < rayCount; ray++) {
    const before = rayBeside(view, ray, -1);
    const after = rayBeside(view, ray, 1);
    if (before < 0 || after < 0) continue;
    const start = ray * gateCount;
    const left = before * gateCount;
    const right = after * gateCount;
    // Sums of three rays, moved along.
    let last = 0;
    let here = (kind[left] as number) + (kind[start] as number) + (kind[right] as number);
    for (let gate = 0; gate < gateCount; gate++) {
      const next =
        gate + 1 < gateCount
          ? (kind[left + gate + 1] as number) +
            (kind[start + gate + 1] as number) +
            (kind[right + gate + 1] as number)
          : 0;
      // The gate itself is one of them.
      if (last + here + next <= ENOUGH_NEIGHBOURS && kind[start + gate] === 1) {
        screenedBy[start + gate] = (screenedBy[start + gate] as number) | bit;
      }
      last = here;
      here = next;
    }
  }
}
