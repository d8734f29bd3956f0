import { screenBit } from "../polar-echo.ts";
import type { Evidence } from "./evidence.ts";
import { rayBeside, type SweepView } from "./sweep-view.ts";

/** A spike is at most so wide to each side of its middle; the rays beyond it tell what is there without it. House rule. */
const REACH_DEG = 3;
/** Echo that the rays to both sides show at least so much weaker stands out. House rule. */
const OUTSTANDING_DB = 5;
/** Received power of another transmitter, or of the sun, is even along the ray within this. House rule. */
const EVEN_WITHIN_DB = 5;
/** So much of the ray, where nothing hides it, must show it. House rule. */
const SHOWN_SHARE = 0.7;
/** So much of the ray must be open to judge by, and at least so many gates. House rule. */
const OPEN_SHARE = 0.2;
const OPEN_GATES = 10;
/** Classes of power that find the middle of what stands out. */
const CLASS_DB = 1;
const LOWEST_DB = -100;
const CLASSES = 160;

/**
 * A ray of even received power from the antenna outward: another transmitter or the sun, whose power does not
 * depend on range, so that its reflectivity grows with the square of the range. Rain does neither.
 *
 * Source of the signature: Holleman, Huuskonen, Gill and Tabary (2010), J. Atmos. Oceanic Technol. 27, 881-887;
 * the test is a house rule. Strong, for the gates whose echo is no stronger than the spike; rain above it stays.
 */
export function screenSpikes(view: SweepView, { strong }: Evidence): void {
  const { echo, rayCount, gateCount, rangeGainDb, rayStepDeg, echoAt, echoStart } = view;
  const reach = Math.max(3, Math.round(REACH_DEG / rayStepDeg));
  if (rayCount < 2 * reach + 1 || gateCount < OPEN_GATES) return;
  const bit = screenBit("spike");
  const { measuredDbz } = echo;
  const classes = new Uint32Array(CLASSES);
  for (let ray = 0; ray < rayCount; ray++) {
    const left = rayBeside(view, ray, -reach);
    const right = rayBeside(view, ray, reach);
    if (left < 0 || right < 0) continue;
    const start = ray * gateCount;
    classes.fill(0);
    if ((echoStart[ray + 1] as number) - (echoStart[ray] as number) < OPEN_GATES) continue;
    const standing = countOutstanding(view, ray, left, right, classes);
    if (standing < OPEN_GATES || standing < SHOWN_SHARE * OPEN_SHARE * gateCount) continue;
    const powerDb = medianOf(classes, standing);
    if (!isSpike(view, ray, left, right, powerDb)) continue;
    for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k++) {
      const at = echoAt[k] as number;
      const overDb = (measuredDbz[at] as number) - (rangeGainDb[at - start] as number) - powerDb;
      if (overDb <= EVEN_WITHIN_DB) strong[at] = (strong[at] as number) | bit;
    }
  }
}

/** Sorts the power of the gates that stand out on both sides into classes. */
function countOutstanding(
  { echo: { measuredDbz }, gateCount, rangeGainDb, echoAt, echoStart }: SweepView,
  ray: number,
  left: number,
  right: number,
  classes: Uint32Array,
): number {
  let standing = 0;
  for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k++) {
    const at = echoAt[k] as number;
    const gate = at - ray * gateCount;
    const dbz = measuredDbz[at] as number;
    const limit = dbz - OUTSTANDING_DB;
    if (!(limit >= (measuredDbz[left * gateCount + gate] as number))) continue;
    if (!(limit >= (measuredDbz[right * gateCount + gate] as number))) continue;
    standing++;
    const place = ((dbz - (rangeGainDb[gate] as number) - LOWEST_DB) / CLASS_DB) | 0;
    const held = place < 0 ? 0 : place >= CLASSES ? CLASSES - 1 : place;
    classes[held] = (classes[held] as number) + 1;
  }
  return standing;
}

function medianOf(classes: Uint32Array, count: number): number {
  let passed = count / 2;
  let place = 0;
  for (; place < CLASSES - 1; place++) {
    passed -= classes[place] as number;
    if (passed < 0) break;
  }
  return LOWEST_DB + (place + 0.5) * CLASS_DB;
}

/** Whether the power stands where nothing to the sides would hide it, on enough of the ray, near and far. */
function isSpike(
  { echo: { measuredDbz }, gateCount, rangeGainDb }: SweepView,
  ray: number,
  left: number,
  right: number,
  powerDb: number,
): boolean {
  const half = gateCount >> 1;
  let open = 0;
  let openFar = 0;
  let shown = 0;
  let shownFar = 0;
  for (let gate = 0; gate < gateCount; gate++) {
    const expectedDbz = powerDb + (rangeGainDb[gate] as number);
    const limit = expectedDbz - OUTSTANDING_DB;
    const l = measuredDbz[left * gateCount + gate] as number;
    const r = measuredDbz[right * gateCount + gate] as number;
    const dbz = measuredDbz[ray * gateCount + gate] as number;
    if (!(l <= limit && r <= limit) || Number.isNaN(dbz)) continue;
    const isShown = Math.abs(dbz - expectedDbz) <= EVEN_WITHIN_DB ? 1 : 0;
    open++;
    shown += isShown;
    if (gate >= half) {
      openFar++;
      shownFar += isShown;
    }
  }
  if (open < OPEN_GATES || open < OPEN_SHARE * gateCount) return false;
  return shown >= SHOWN_SHARE * open && shownFar >= SHOWN_SHARE * openFar;
}
