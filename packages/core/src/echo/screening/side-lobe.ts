import { markBit } from "../polar-echo.ts";
import { rayBeside, type SweepView } from "./sweep-view.ts";

/** Cores from here on show through side lobes. House rule. */
const CORE_DBZ = 50;
/** First side lobes lie 23 to 30 dB below the main lobe one way (common practice), so twice that for echo. */
const LOBE_DOWN_DB = 46;
/** Side lobes that matter lie within this of the axis, and the main lobe ends at about this. House rules. */
const WITHIN_DEG = 10;
const MAIN_LOBE_DEG = 1.5;

/**
 * Marks weak echo at the range of an intense core, off the beam's own width: such side lobes make, and rain too.
 *
 * @returns how many gates are marked
 */
export function markSideLobes(view: SweepView): number {
  const { echo, rayCount, gateCount, rayStepDeg, echoAt } = view;
  const { measuredDbz, marks, screenedBy } = echo;
  const bit = markBit("side-lobe");
  const widest = Math.min(Math.floor(WITHIN_DEG / rayStepDeg), (rayCount - 1) >> 1);
  const narrowest = Math.ceil(MAIN_LOBE_DEG / rayStepDeg);
  let marked = 0;
  for (let k = 0; k < echoAt.length; k++) {
    const at = echoAt[k] as number;
    if (!((measuredDbz[at] as number) >= CORE_DBZ) || screenedBy[at] !== 0) continue;
    const ray = Math.floor(at / gateCount);
    const gate = at - ray * gateCount;
    const limit = (measuredDbz[at] as number) - LOBE_DOWN_DB;
    for (let offset = narrowest; offset <= widest; offset++) {
      for (const side of [-offset, offset]) {
        const beside = rayBeside(view, ray, side);
        if (beside < 0) continue;
        const other = beside * gateCount + gate;
        const dbz = measuredDbz[other] as number;
        if (!(dbz <= limit && dbz > Number.NEGATIVE_INFINITY) || ((marks[other] as number) & bit) !== 0)
          continue;
        marks[other] = (marks[other] as number) | bit;
        marked++;
      }
    }
  }
  return marked;
}
