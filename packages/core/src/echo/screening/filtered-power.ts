import { screenBit } from "../polar-echo.ts";
import type { Evidence } from "./evidence.ts";
import type { SweepView } from "./sweep-view.ts";

/** From here on the filter found ground echo in the gate. House rule. */
const FILTERED_WEAK_DB = 6;
/** From here on what is left may as well be what the filter could not take. House rule. */
const FILTERED_STRONG_DB = 25;

/**
 * TH well above DBZH: the clutter filter took much away, and what it leaves of ground echo is no rain.
 *
 * Filters take some 20 to 40 dB of ground echo (common practice), so that 25 dB is strong evidence; rain across
 * the beam loses power to them too, so that less is weak.
 */
export function screenFilteredPower({ echo, echoAt }: SweepView, { strong, weak }: Evidence): void {
  const bit = screenBit("filtered-power");
  const { measuredDbz } = echo;
  const unfiltered = echo.unfilteredDbz as Float32Array;
  for (let k = 0; k < echoAt.length; k++) {
    const at = echoAt[k] as number;
    const tookDb = (unfiltered[at] as number) - (measuredDbz[at] as number);
    if (!(tookDb >= FILTERED_WEAK_DB)) continue;
    if (tookDb >= FILTERED_STRONG_DB) strong[at] = (strong[at] as number) | bit;
    else weak[at] = (weak[at] as number) | bit;
  }
}
