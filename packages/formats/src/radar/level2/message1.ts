import { messageEpochMs } from "./messages.ts";
import type { Radial, RadialMoment } from "./radial.ts";

const HEADER_BYTES = 100;
const MAX_GATES = 2400;
/** Angles are coded in the upper 13 bits of a halfword, 180/4096 of a degree each. */
const DEG_PER_CODE = 180 / 4096 / 8;
const QUANTITIES = ["DBZH", "VRADH", "WRADH"] as const;

/**
 * A ray of message 1, "Digital Radar Data", as volumes held it before 2008. It does not say where the radar stands.
 *
 * @returns undefined where the message does not hold together
 * @see Interface Control Document for the RDA/RPG, 2620002, NOAA Radar Operations Center: table III, and the
 *   conversions of its table III-A: dBZ = code/2 - 33; m/s = code/2 - 64.5, or code - 129 at the coarse resolution
 */
export function radialOfMessage1(body: Buffer): Radial | undefined {
  if (body.length < HEADER_BYTES) return undefined;
  const halfword = (at: number) => body.readUInt16BE(at);
  const surveillance = { firstM: body.readInt16BE(18), lengthM: halfword(22), count: halfword(26) };
  const doppler = { firstM: body.readInt16BE(20), lengthM: halfword(24), count: halfword(28) };
  const coarse = halfword(42) === 4;
  const moments: RadialMoment[] = [];
  for (const [index, quantity] of QUANTITIES.entries()) {
    const pointer = halfword(36 + 2 * index);
    const { firstM, lengthM, count } = quantity === "DBZH" ? surveillance : doppler;
    if (pointer === 0 || count === 0) continue;
    if (!(lengthM > 0 && count <= MAX_GATES && pointer >= HEADER_BYTES && pointer + count <= body.length)) {
      return undefined;
    }
    const [scale, offset] = scaling(quantity, coarse);
    const codes = body.subarray(pointer, pointer + count);
    const gates = { firstGateCentreM: firstM, gateLengthM: lengthM, gateCount: count };
    moments.push({ quantity, ...gates, scale, offset, wordBytes: 1, codes });
  }
  const nyquist = halfword(60) / 100;
  return {
    epochMs: messageEpochMs(halfword(4), body.readUInt32BE(0)),
    azimuthDeg: halfword(8) * DEG_PER_CODE,
    azimuthNumber: halfword(10),
    status: halfword(12),
    elevationDeg: belowHorizon(halfword(14) * DEG_PER_CODE),
    elevationNumber: halfword(16),
    ...(nyquist > 0 ? { nyquistVelocityMPerS: nyquist } : {}),
    pattern: halfword(44),
    moments,
  };
}

/** As message 31 writes it: value = (code - offset) / scale. */
function scaling(
  quantity: (typeof QUANTITIES)[number],
  coarse: boolean,
): readonly [scale: number, offset: number] {
  if (quantity === "DBZH") return [2, 66];
  return quantity === "VRADH" && coarse ? [1, 129] : [2, 129];
}

/** Elevations are coded as azimuths are: 359.9 degrees is a tenth below the horizon. */
function belowHorizon(angleDeg: number): number {
  return angleDeg > 180 ? angleDeg - 360 : angleDeg;
}
