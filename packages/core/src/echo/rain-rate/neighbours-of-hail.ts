import type { PolarEcho } from "../polar-echo.ts";
import { isClosed, isLiquid } from "./moment-reader.ts";
import { ramp } from "./ramp.ts";

/** Half width of the square that is searched, and the most rays that it takes close to the radar. House rule. */
const REACH_M = 3500;
const MOST_RAYS = 8;
/** Echo that counts as rain of the same storm, dBZ. */
const RAIN_DBZ = { from: 15, to: 25 } as const;

/**
 * Mean rain of the gates around one with hail, hail left out: what most likely falls beside the stones.
 *
 * It is nearer to the truth than any cap: hail of 60 dBZ lies over rain of 10 mm/h as well as of 60 mm/h. The gate's
 * own rate, held by the cap, counts as one gate, so that the mean is defined in a storm that is all hail.
 *
 * @param rateMmPerHour - by gate, made as if there were no hail
 * @param hailShare - by gate
 */
export function neighboursOfHail(
  { dbz, marks, header, azimuthDeg }: PolarEcho,
  rateMmPerHour: Float32Array,
  hailShare: Float32Array,
  gate: number,
): number {
  const { gateCount, rayCount, gateLengthM, firstGateCentreM } = header;
  const middle = gate % gateCount;
  const ray = (gate - middle) / gateCount;
  const gates = Math.max(1, Math.round(REACH_M / gateLengthM));
  const rangeM = firstGateCentreM + middle * gateLengthM;
  const rays = Math.min(
    MOST_RAYS,
    Math.floor((rayCount - 1) / 2),
    Math.max(1, Math.round((REACH_M * rayCount) / (2 * Math.PI * rangeM))),
  );
  const from = Math.max(0, middle - gates);
  const to = Math.min(gateCount - 1, middle + gates);
  const closed = isClosed(azimuthDeg);
  let sum = rateMmPerHour[gate];
  let weights = 1;
  for (let step = -rays; step <= rays; step++) {
    if (!closed && (ray + step < 0 || ray + step >= rayCount)) continue;
    const other = (ray + step + rayCount) % rayCount;
    for (let at = other * gateCount + from; at <= other * gateCount + to; at++) {
      const value = dbz[at];
      if (!(value > RAIN_DBZ.from) || !isLiquid(marks[at])) continue;
      const weight = (1 - hailShare[at]) * ramp(value, RAIN_DBZ.from, RAIN_DBZ.to);
      sum += weight * rateMmPerHour[at];
      weights += weight;
    }
  }
  return sum / weights;
}
