/**
 * For tests: messages of Archive Level II byte by byte, as the tables of interface control documents 2620002
 * (messages) and 2620010 (volume header) have them. Invented numbers.
 */

export interface MomentBytes {
  /** Three letters, "SW " with a blank. */
  readonly name: string;
  readonly firstGateM: number;
  readonly gateM: number;
  readonly wordBits?: 8 | 16;
  readonly scale: number;
  readonly offset: number;
  readonly codes: readonly number[];
}

export interface RayBytes {
  readonly msOfDay: number;
  readonly azimuthNumber: number;
  readonly azimuthDeg: number;
  readonly elevationDeg: number;
  readonly elevationNumber: number;
  readonly status: number;
}

/** 2031-05-03 as a modified Julian date in which day 1 is 1970-01-01. */
export const DAY = Date.parse("2031-05-03T00:00:00Z") / 86_400_000 + 1;

export const REFLECTIVITY: MomentBytes = {
  name: "REF",
  firstGateM: 2125,
  gateM: 250,
  scale: 2,
  offset: 66,
  codes: [0, 1, 2, 66, 166],
};

/** The volume header record: 24 bytes. */
export function volumeHeader(version = "AR2V0006."): Buffer {
  const bytes = Buffer.alloc(24);
  bytes.write(`${version}001`, 0, "latin1");
  bytes.writeUInt32BE(DAY, 12);
  bytes.writeUInt32BE(43_200_000, 16);
  bytes.write("KZZZ", 20, "latin1");
  return bytes;
}

/** A message behind its 12 bytes of channel information and 16 bytes of header. */
export function framed(type: number, body: Buffer): Buffer {
  const head = Buffer.alloc(28);
  head.writeUInt16BE((16 + body.length) / 2, 12);
  head.writeUInt8(type, 15);
  head.writeUInt16BE(DAY, 18);
  head.writeUInt16BE(1, 24);
  head.writeUInt16BE(1, 26);
  const message = Buffer.concat([head, body]);
  // All but message 31 fill a frame of 2432 bytes.
  return type === 31 ? message : Buffer.concat([message, Buffer.alloc(2432 - message.length)]);
}

/** A ray of message 31 with its volume, elevation and radial blocks. */
export function ray31(ray: RayBytes, moments: readonly MomentBytes[], withPlace = true): Buffer {
  const blocks = [...(withPlace ? [volumeBlock()] : []), radialBlock(), ...moments.map(momentBlock)];
  const header = Buffer.alloc(32 + 4 * blocks.length);
  header.write("KZZZ", 0, "latin1");
  header.writeUInt32BE(ray.msOfDay, 4);
  header.writeUInt16BE(DAY, 8);
  header.writeUInt16BE(ray.azimuthNumber, 10);
  header.writeFloatBE(ray.azimuthDeg, 12);
  header.writeUInt8(1, 20);
  header.writeUInt8(ray.status, 21);
  header.writeUInt8(ray.elevationNumber, 22);
  header.writeFloatBE(ray.elevationDeg, 24);
  header.writeUInt16BE(blocks.length, 30);
  let at = header.length;
  blocks.forEach((block, index) => {
    header.writeUInt32BE(at, 32 + 4 * index);
    at += block.length;
  });
  header.writeUInt16BE(at, 18);
  const body = Buffer.concat([header, ...blocks]);
  return framed(31, body.length % 2 === 0 ? body : Buffer.concat([body, Buffer.alloc(1)]));
}

function volumeBlock(): Buffer {
  const block = Buffer.alloc(44);
  block.write("RVOL", 0, "latin1");
  block.writeUInt16BE(44, 4);
  block.writeFloatBE(40.5, 8);
  block.writeFloatBE(-100.25, 12);
  block.writeInt16BE(500, 16);
  block.writeUInt16BE(20, 18);
  block.writeUInt16BE(212, 40);
  return block;
}

function radialBlock(): Buffer {
  const block = Buffer.alloc(28);
  block.write("RRAD", 0, "latin1");
  block.writeUInt16BE(28, 4);
  block.writeUInt16BE(4660, 6);
  block.writeUInt16BE(2650, 16);
  return block;
}

function momentBlock({ name, firstGateM, gateM, wordBits = 8, scale, offset, codes }: MomentBytes): Buffer {
  const width = wordBits / 8;
  const block = Buffer.alloc(28 + codes.length * width);
  block.write(`D${name}`, 0, "latin1");
  block.writeUInt16BE(codes.length, 8);
  block.writeInt16BE(firstGateM, 10);
  block.writeUInt16BE(gateM, 12);
  block.writeUInt8(wordBits, 19);
  block.writeFloatBE(scale, 20);
  block.writeFloatBE(offset, 24);
  codes.forEach((code, gate) => {
    block.writeUIntBE(code, 28 + gate * width, width);
  });
  return block;
}

export interface Ray1Bytes extends Omit<RayBytes, "azimuthDeg" | "elevationDeg"> {
  /** Coded angles: 8 times a whole number of 180/4096 degree. */
  readonly azimuthCode: number;
  readonly elevationCode: number;
  readonly surveillance?: {
    readonly firstM: number;
    readonly gateM: number;
    readonly codes: readonly number[];
  };
  readonly doppler?: {
    readonly firstM: number;
    readonly gateM: number;
    readonly velocity: readonly number[];
    readonly width: readonly number[];
    /** 2 is 0.5 m/s, 4 is 1 m/s. */
    readonly resolution: 2 | 4;
  };
}

/** A ray of message 1, "Digital Radar Data". */
export function ray1(ray: Ray1Bytes): Buffer {
  const { surveillance, doppler } = ray;
  const header = Buffer.alloc(100);
  header.writeUInt32BE(ray.msOfDay, 0);
  header.writeUInt16BE(DAY, 4);
  header.writeUInt16BE(4660, 6);
  header.writeUInt16BE(ray.azimuthCode, 8);
  header.writeUInt16BE(ray.azimuthNumber, 10);
  header.writeUInt16BE(ray.status, 12);
  header.writeUInt16BE(ray.elevationCode, 14);
  header.writeUInt16BE(ray.elevationNumber, 16);
  header.writeInt16BE(surveillance?.firstM ?? 0, 18);
  header.writeInt16BE(doppler?.firstM ?? 0, 20);
  header.writeUInt16BE(surveillance?.gateM ?? 0, 22);
  header.writeUInt16BE(doppler?.gateM ?? 0, 24);
  header.writeUInt16BE(surveillance?.codes.length ?? 0, 26);
  header.writeUInt16BE(doppler?.velocity.length ?? 0, 28);
  const arrays = [surveillance?.codes ?? [], doppler?.velocity ?? [], doppler?.width ?? []];
  let at = 100;
  arrays.forEach((codes, index) => {
    header.writeUInt16BE(codes.length === 0 ? 0 : at, 36 + 2 * index);
    at += codes.length;
  });
  header.writeUInt16BE(doppler?.resolution ?? 2, 42);
  header.writeUInt16BE(21, 44);
  header.writeUInt16BE(2650, 60);
  const body = Buffer.concat([header, ...arrays.map((codes) => Buffer.from(codes))]);
  return framed(1, body.length % 2 === 0 ? body : Buffer.concat([body, Buffer.alloc(1)]));
}

/** A record: the length of its bzip2 stream, negative for the last of a volume, then the stream. */
export function record(bzip2Stream: Buffer, isLast = false): Buffer {
  const length = Buffer.alloc(4);
  length.writeInt32BE(isLast ? -bzip2Stream.length : bzip2Stream.length);
  return Buffer.concat([length, bzip2Stream]);
}

/** The rays of one turn in `count` steps from `fromDeg`, statuses as a whole turn has them. */
export function turn(
  elevationNumber: number,
  elevationDeg: number,
  count: number,
  msOfDay: number,
  fromDeg = 0,
): RayBytes[] {
  return Array.from({ length: count }, (_, index) => ({
    msOfDay: msOfDay + index * 100,
    azimuthNumber: index + 1,
    azimuthDeg: (fromDeg + (index * 360) / count) % 360,
    elevationDeg,
    elevationNumber,
    status: index === 0 ? 0 : index === count - 1 ? 2 : 1,
  }));
}

const VELOCITY: MomentBytes = { ...REFLECTIVITY, name: "VEL", offset: 129, codes: [0, 1, 129, 131] };
const PHASE: MomentBytes = {
  ...REFLECTIVITY,
  name: "PHI",
  wordBits: 16,
  scale: 2.8361,
  offset: 2,
  codes: [0, 1, 2, 1023, 5],
};

/** Messages of a small volume: a surveillance cut, a Doppler cut at the same elevation, and a higher cut. */
export function smallVolume(): readonly Buffer[] {
  const surveillance = turn(1, 0.5, 8, 43_200_000, 180).map((ray) => ray31(ray, [REFLECTIVITY, PHASE]));
  const doppler = turn(2, 0.5, 8, 43_210_000).map((ray) =>
    ray31(ray, [{ ...REFLECTIVITY, codes: [1, 1, 70] }, VELOCITY]),
  );
  const high = turn(3, 2.4, 8, 43_220_000).map((ray) => ray31(ray, [REFLECTIVITY, VELOCITY]));
  return [...surveillance, ...doppler, ...high];
}

/** Messages 1 of one turn: 360 rays of 40 gates of 1 km at 40 dBZ, the first a degree past north. */
export function evenMessage1Turn(): readonly Buffer[] {
  return Array.from({ length: 360 }, (_, index) =>
    ray1({
      msOfDay: 43_200_000 + index * 50,
      azimuthNumber: index + 1,
      azimuthCode: Math.round((index + 0.5) / (180 / 4096)) * 8,
      elevationCode: 11 * 8,
      elevationNumber: 1,
      status: index === 0 ? 3 : index === 359 ? 4 : 1,
      surveillance: { firstM: 500, gateM: 1000, codes: new Array<number>(40).fill(146) },
    }),
  );
}
