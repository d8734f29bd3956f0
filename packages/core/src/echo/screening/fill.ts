import { decibels, zMm6PerM3 } from "../../units.ts";
import { markBit } from "../polar-echo.ts";
import { rayBeside, type SweepView } from "./sweep-view.ts";

/** Rays and gates to either side that may fill a gate, and the distance that they must lie within. House rules. */
const REACH = 3;
const WITHIN_M = 3000;
/** Neighbours that it takes. House rule. */
const ENOUGH = 3;

/**
 * Fills screened gates with the mean Z of the unscreened gates around them, nearest ring first; dry gates count
 * as 0. A gate without enough of them stays not observed.
 *
 * @returns how many were filled
 */
export function fillFromNeighbours(view: SweepView): number {
  const { echo, rayCount, gateCount, echoAt, echoStart } = view;
  const { dbz, screenedBy, marks } = echo;
  const bit = markBit("filled");
  let filled = 0;
  for (let ray = 0; ray < rayCount; ray++) {
    for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k++) {
      const at = echoAt[k] as number;
      if (screenedBy[at] === 0) continue;
      const value = meanAround(view, ray, at - ray * gateCount);
      if (Number.isNaN(value)) continue;
      dbz[at] = value;
      marks[at] = (marks[at] as number) | bit;
      filled++;
    }
  }
  return filled;
}

/** Mean Z of the nearest ring that holds enough, as dBZ; NaN where none does. */
function meanAround(view: SweepView, ray: number, gate: number): number {
  const { echo, gateCount, rayStepDeg } = view;
  const { measuredDbz, screenedBy, header } = echo;
  const rangeM = header.firstGateCentreM + gate * header.gateLengthM;
  const rayApartM = (rangeM * rayStepDeg * Math.PI) / 180;
  let sum = 0;
  let count = 0;
  for (let ring = 1; ring <= REACH; ring++) {
    for (let side = -ring; side <= ring; side++) {
      if (Math.abs(side) * rayApartM > WITHIN_M) continue;
      const beside = rayBeside(view, ray, side);
      if (beside < 0) continue;
      // Only the rim of the ring: what lies within was asked before.
      const step = Math.abs(side) === ring ? 1 : 2 * ring;
      for (let along = -ring; along <= ring; along += step) {
        const other = gate + along;
        if (other < 0 || other >= gateCount || Math.abs(along) * header.gateLengthM > WITHIN_M) continue;
        const at = beside * gateCount + other;
        const value = measuredDbz[at] as number;
        if (Number.isNaN(value) || screenedBy[at] !== 0) continue;
        sum += value > Number.NEGATIVE_INFINITY ? zMm6PerM3(value) : 0;
        count++;
      }
    }
    if (count >= ENOUGH) return decibels(sum / count);
  }
  return Number.NaN;
}
