import { messageEpochMs } from "./messages.ts";
import type { AntennaPlace, Radial, RadialMoment } from "./radial.ts";

const QUANTITIES: Readonly<Record<string, string>> = {
  REF: "DBZH",
  VEL: "VRADH",
  "SW ": "WRADH",
  ZDR: "ZDR",
  PHI: "PHIDP",
  RHO: "RHOHV",
};
const HEADER_BYTES = 32;
const MOMENT_HEADER_BYTES = 28;
const MAX_BLOCKS = 32;
const MAX_GATES = 20_000;

/**
 * A ray of message 31, "Digital Radar Data Generic Format".
 *
 * @returns undefined where the message does not hold together
 * @see Interface Control Document for the RDA/RPG, 2620002, NOAA Radar Operations Center: tables XVII-A to XVII-H
 */
export function radialOfMessage31(body: Buffer): Radial | undefined {
  // A compressed body is foreseen by the document and was never sent.
  if (body.length < HEADER_BYTES || body.readUInt8(16) !== 0) return undefined;
  const blockCount = body.readUInt16BE(30);
  if (blockCount > MAX_BLOCKS || HEADER_BYTES + 4 * blockCount > body.length) return undefined;
  const moments: RadialMoment[] = [];
  let volume: { place: AntennaPlace; pattern: number } | undefined;
  let nyquist: number | undefined;
  for (let block = 0; block < blockCount; block++) {
    const at = body.readUInt32BE(HEADER_BYTES + 4 * block);
    if (at === 0) continue;
    if (at + 8 > body.length) return undefined;
    const name = body.toString("latin1", at + 1, at + 4);
    if (name === "VOL" && at + 44 <= body.length) volume = volumeBlock(body, at);
    else if (name === "RAD" && at + 18 <= body.length) nyquist = body.readUInt16BE(at + 16) / 100;
    else if (Object.hasOwn(QUANTITIES, name)) {
      const moment = momentBlock(body, at, QUANTITIES[name] as string);
      if (moment === undefined) return undefined;
      moments.push(moment);
    }
  }
  const station = body.toString("latin1", 0, 4);
  return {
    ...(/^[A-Z][A-Z0-9]{3}$/.test(station) ? { station } : {}),
    ...(volume === undefined ? {} : volume),
    epochMs: messageEpochMs(body.readUInt16BE(8), body.readUInt32BE(4)),
    azimuthNumber: body.readUInt16BE(10),
    azimuthDeg: body.readFloatBE(12),
    status: body.readUInt8(21),
    elevationNumber: body.readUInt8(22),
    elevationDeg: body.readFloatBE(24),
    ...(nyquist !== undefined && nyquist > 0 ? { nyquistVelocityMPerS: nyquist } : {}),
    moments,
  };
}

function volumeBlock(body: Buffer, at: number): { place: AntennaPlace; pattern: number } {
  const [groundM, feedhornM] = [body.readInt16BE(at + 16), body.readUInt16BE(at + 18)];
  return {
    place: {
      latDeg: body.readFloatBE(at + 8),
      lonDeg: body.readFloatBE(at + 12),
      antennaHeightM: groundM + feedhornM,
    },
    pattern: body.readUInt16BE(at + 40),
  };
}

function momentBlock(body: Buffer, at: number, quantity: string): RadialMoment | undefined {
  if (at + MOMENT_HEADER_BYTES > body.length) return undefined;
  const gateCount = body.readUInt16BE(at + 8);
  const wordBits = body.readUInt8(at + 19);
  const scale = body.readFloatBE(at + 20);
  const offset = body.readFloatBE(at + 24);
  const gateLengthM = body.readUInt16BE(at + 12);
  const wordBytes = wordBits === 16 ? 2 : 1;
  const from = at + MOMENT_HEADER_BYTES;
  const sound =
    (wordBits === 8 || wordBits === 16) &&
    gateCount <= MAX_GATES &&
    gateLengthM > 0 &&
    Math.abs(scale) > 1e-6 &&
    Math.abs(scale) < 1e6 &&
    Math.abs(offset) < 1e6;
  if (!sound || from + gateCount * wordBytes > body.length) return undefined;
  return {
    quantity,
    firstGateCentreM: body.readInt16BE(at + 10),
    gateLengthM,
    gateCount,
    scale,
    offset,
    wordBytes,
    codes: body.subarray(from, from + gateCount * wordBytes),
  };
}
