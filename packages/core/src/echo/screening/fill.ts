import { decibels, zMm6PerM3 } from "../../units.ts";
import { markBit } from "../polar-echo.ts";
import { rayBeside, type SweepView } from "./sweep-view.ts";

/**
 * Windows around a gate, rays and gates to either side: the near one where it holds enough, else the wide one; and
 * the distance that neighbours must lie within. House rules.
 */
const NEAR = { rays: 2, gates: 1 };
const WIDE = { rays: 6, gates: 3 };
const WITHIN_M = 3000;
/** Neighbours that it takes: of the near window, and of the wide one. House rule. */
const ENOUGH_NEAR = 6;
const ENOUGH = 3;
/**
 * And this share of what was observed there: amid much false echo what is left of it is no better, and the next
 * sweep may speak. House rule.
 */
const SOUND_SHARE = 0.5;
/** Z by reflectivity in steps of 0.05 dB from -100 to 100 dBZ, since powers are slow. */
const STEPS_PER_DB = 20;
const LOWEST_DBZ = -100;
const Z_TABLE = Float64Array.from({ length: 200 * STEPS_PER_DB + 1 }, (_, step) =>
  zMm6PerM3(LOWEST_DBZ + step / STEPS_PER_DB),
);

/**
 * Fills screened gates with the mean Z of the unscreened gates within 3 km, weighted by the inverse square of
 * their distance; dry gates count as 0. Never above what was measured there, since false echo only adds to that of
 * rain. A gate without enough of them stays not observed.
 *
 * Source of the weights: common practice (Shepard 1968, Proc. 23rd ACM National Conference, 517-524).
 *
 * @returns how many were filled
 */
export function fillFromNeighbours(view: SweepView): number {
  const { echo, rayCount, gateCount, echoAt, echoStart } = view;
  const { dbz, measuredDbz, screenedBy, marks } = echo;
  const bit = markBit("filled");
  let filled = 0;
  for (let ray = 0; ray < rayCount; ray++) {
    for (let k = echoStart[ray] as number; k < (echoStart[ray + 1] as number); k++) {
      const at = echoAt[k] as number;
      if (screenedBy[at] === 0) continue;
      let value = meanAround(view, ray, at - ray * gateCount, NEAR, ENOUGH_NEAR);
      if (Number.isNaN(value)) value = meanAround(view, ray, at - ray * gateCount, WIDE, ENOUGH);
      if (Number.isNaN(value)) continue;
      dbz[at] = Math.min(value, measuredDbz[at] as number);
      marks[at] = (marks[at] as number) | bit;
      filled++;
    }
  }
  return filled;
}

/** Weighted mean Z around a gate, as dBZ; NaN where too few gates tell. */
function meanAround(
  view: SweepView,
  ray: number,
  gate: number,
  window: { readonly rays: number; readonly gates: number },
  enough: number,
): number {
  const { echo, rayCount, gateCount, rayStepDeg } = view;
  const { measuredDbz, screenedBy, header } = echo;
  const { gateLengthM } = header;
  const rangeM = Math.max(0, header.firstGateCentreM + gate * gateLengthM);
  const rayApartM = Math.max(1, (rangeM * rayStepDeg * Math.PI) / 180);
  const rays = Math.min(window.rays, Math.floor(WITHIN_M / rayApartM), (rayCount - 1) >> 1);
  const gates = Math.min(window.gates, Math.floor(WITHIN_M / gateLengthM));
  const first = Math.max(0, gate - gates);
  const last = Math.min(gateCount - 1, gate + gates);
  let sum = 0;
  let weights = 0;
  let observed = 0;
  let count = 0;
  for (let side = -rays; side <= rays; side++) {
    const beside = rayBeside(view, ray, side);
    if (beside < 0) continue;
    const acrossM = side * rayApartM;
    for (let other = first; other <= last; other++) {
      const at = beside * gateCount + other;
      const value = measuredDbz[at] as number;
      if (Number.isNaN(value)) continue;
      observed++;
      if (screenedBy[at] !== 0) continue;
      const alongM = (other - gate) * gateLengthM;
      const weight = 1 / (acrossM * acrossM + alongM * alongM);
      if (value > Number.NEGATIVE_INFINITY) sum += weight * tabulatedZ(value);
      weights += weight;
      count++;
    }
  }
  return count >= enough && count >= SOUND_SHARE * observed ? decibels(sum / weights) : Number.NaN;
}

function tabulatedZ(dbz: number): number {
  const step = Math.round((dbz - LOWEST_DBZ) * STEPS_PER_DB);
  return Z_TABLE[step < 0 ? 0 : step >= Z_TABLE.length ? Z_TABLE.length - 1 : step] as number;
}
