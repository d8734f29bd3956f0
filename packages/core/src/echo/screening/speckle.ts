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
  const { echo, rayCount, gateCount, echoAt, echoStart } = view;
  const { measuredDbz, screenedBy } = echo;
  const bit = screenBit("speckle");
  // Judged on what the other screens left, not on what this one takes on the way.
  const alone: number[] = [];
  const stands = (at: number): boolean =>
    screenedBy[at] === 0 && (measuredDbz[at] as number) > Number.NEGATIVE_INFINITY;
  for (let ray = 0; ray < rayCount; ray++) {
    const start = ray * gateCount;
    const before = rayBeside(view, ray, -1);
    const after = rayBeside(view, ray, 1);
    if (before < 0 || after < 0) continue;
    for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k++) {
      const at = echoAt[k] as number;
      if (screenedBy[at] !== 0) continue;
      const gate = at - start;
      // Most echo has it on both sides.
      if (gate > 0 && gate + 1 < gateCount && stands(at - 1) && stands(at + 1)) continue;
      const first = gate > 0 ? -1 : 0;
      const last = gate + 1 < gateCount ? 1 : 0;
      // The gate itself is not among its neighbours.
      let neighbours = -1;
      let unknown = false;
      for (let side = 0; side < 3; side++) {
        const beside = side === 0 ? before : side === 1 ? ray : after;
        for (let along = first; along <= last; along++) {
          const other = beside * gateCount + gate + along;
          if (stands(other)) neighbours++;
          else if (Number.isNaN(measuredDbz[other])) unknown = true;
        }
      }
      if (neighbours < ENOUGH_NEIGHBOURS && !unknown) alone.push(at);
    }
  }
  for (const at of alone) screenedBy[at] = bit;
}
