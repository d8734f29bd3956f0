import { spawnSync } from "node:child_process";
import { readFileSync, writeFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { gunzipSync, gzipSync } from "node:zlib";
import { InputError, type Moment, type Sweep } from "@rainreckon/core";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { FOREIGN_TOOLS } from "../../../test/foreign-tools.ts";
import {
  evenMessage1Turn,
  framed,
  REFLECTIVITY,
  ray1,
  ray31,
  record,
  smallVolume,
  turn,
  volumeHeader,
} from "../../../test/level2-bytes.ts";
import { removeTemporary, temporaryPath } from "../../../test/odim-fixture.ts";
import type { ScanOptions } from "../scan-file.ts";
import { formatsReady, openScan, recogniseScan } from "../scan-formats.ts";
import { isScanChunk, openScanChunks } from "./chunks.ts";

beforeAll(formatsReady);
afterAll(removeTemporary);

const noon = Date.parse("2031-05-03T12:00:00Z");

function written(...parts: readonly Buffer[]): string {
  const path = temporaryPath("KZZZ20310503_120000");
  writeFileSync(path, Buffer.concat(parts));
  return path;
}

function fault(call: () => unknown): InputError {
  try {
    call();
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error("nothing was thrown");
}

function sweepAt(path: string, index: number, options: ScanOptions = {}): Sweep {
  const file = openScan(path, options);
  expect(file.inspect()).toEqual([]);
  return file.readSweep(index);
}

function values(sweep: Sweep, quantity: string, ray = 0): number[] {
  const { stored, gain, offset, nodata, undetect } = sweep.moments.get(quantity) as Moment;
  return [...stored.slice(ray * sweep.gateCount, (ray + 1) * sweep.gateCount)].map((code) => {
    if (code === nodata) return Number.NaN;
    return code === undetect ? Number.NEGATIVE_INFINITY : code * gain + offset;
  });
}

/** What 2620002 makes of the codes of the fixture: (code - 66) / 2, 0 below threshold, 1 range-folded. */
const REFLECTIVITIES = [Number.NEGATIVE_INFINITY, Number.NaN, -32, 0, 50];

function checkSmallVolume(path: string): void {
  const file = openScan(path);
  expect(file.format).toBe("Archive Level II");
  expect(file.leftOut).toEqual([]);
  expect(file.remarks).toEqual([]);
  expect(file.headers.map(({ elevationDeg, quantities }) => [elevationDeg, quantities.join(" ")])).toEqual([
    [0.5, "DBZH PHIDP"],
    [0.5, "DBZH VRADH"],
    [expect.closeTo(2.4, 6), "DBZH VRADH"],
  ]);
  expect(file.headers[0]).toMatchObject({
    site: { id: "ICAO-KZZZ", lonDeg: -100.25, latDeg: 40.5, antennaHeightM: 520 },
    origin: { path, dataset: "cut 1" },
    rayCount: 8,
    gateCount: 5,
    firstGateCentreM: 2125,
    gateLengthM: 250,
    startEpochMs: noon,
    endEpochMs: noon + 700,
    nyquistVelocityMPerS: 26.5,
    remarks: [],
  });
  const low = file.readSweep(0);
  expect([...low.azimuthDeg]).toEqual([0, 45, 90, 135, 180, 225, 270, 315]);
  expect(low.rayTimeEpochMs[4]).toBe(noon);
  expect(values(low, "DBZH")).toEqual(REFLECTIVITIES);
  expect(values(low, "PHIDP")[3]).toBeCloseTo((1023 - 2) / 2.8361, 4);
  const doppler = file.readSweep(1);
  // Gates beyond the last of a shorter moment were not observed.
  expect(values(doppler, "DBZH")).toEqual([Number.NaN, Number.NaN, 2, Number.NaN]);
  expect(values(doppler, "VRADH")).toEqual([Number.NEGATIVE_INFINITY, Number.NaN, 0, 1]);
  file.close();
}

describe("message 31", () => {
  test("plain, gzipped, and with an older volume header", () => {
    const plain = [volumeHeader(), ...smallVolume()];
    checkSmallVolume(written(...plain));
    const zipped = written(gzipSync(Buffer.concat(plain)));
    expect(recogniseScan(zipped)).toBe("Archive Level II");
    checkSmallVolume(zipped);
    checkSmallVolume(written(volumeHeader("ARCHIVE2."), ...smallVolume()));
  });

  test("other messages between the rays, and frames that were never filled", () => {
    const [first, ...rest] = smallVolume();
    const status = framed(2, Buffer.alloc(80));
    const empty = Buffer.alloc(2432);
    checkSmallVolume(written(volumeHeader(), status, empty, first as Buffer, status, ...rest));
  });

  test("a ray that does not hold together is left out and counted, and a cut-off end is said", () => {
    const messages = [...smallVolume()];
    const broken = Buffer.from(messages[3] as Buffer);
    // The first block's pointer leads beyond the message.
    broken.writeUInt32BE(60_000, 28 + 32);
    messages[3] = broken;
    const whole = Buffer.concat([volumeHeader(), ...messages]);
    const file = openScan(written(whole.subarray(0, whole.length - 10)));
    expect(file.remarks.map(({ what }) => what)).toEqual([
      "the file is cut short; what came before is read",
      "1 messages of radar data do not hold together and are left out",
    ]);
    expect(file.headers[0]?.rayCount).toBe(7);
    expect(file.headers[2]?.remarks).toEqual(["Only a part of this turn is there: 7 rays."]);
  });

  test("rays of one turn that differ in scale are refused for that moment only", () => {
    const rays = turn(1, 0.5, 4, 43_200_000).map((ray, index) =>
      ray31(ray, [
        { ...REFLECTIVITY, scale: index === 2 ? 4 : 2 },
        { ...REFLECTIVITY, name: "ZDR" },
      ]),
    );
    const file = openScan(written(volumeHeader(), ...rays));
    expect(file.inspect().map(({ what }) => what)).toEqual([
      "rays of one turn differ in the scale of DBZH: 2 and, at ray 3, 4",
    ]);
    expect(fault(() => file.readSweep(0, ["DBZH"])).where).toMatch(/, cut 1$/);
    expect(file.readSweep(0, ["ZDR"]).rayCount).toBe(4);
  });

  test("a ray with a clock of another day is left out", () => {
    const rays = turn(1, 0.5, 4, 43_200_000).map((ray, index) =>
      ray31({ ...ray, msOfDay: index === 1 ? 0 : ray.msOfDay }, [REFLECTIVITY]),
    );
    const sweep = sweepAt(written(volumeHeader(), ...rays), 0);
    expect(sweep.rayCount).toBe(3);
    expect(sweep.remarks).toEqual([
      "1 rays have no azimuth, elevation or time that can be, and are left out.",
    ]);
    expect(sweep.startEpochMs).toBe(noon);
  });

  test("the same elevation number once more is another turn", () => {
    const again = turn(1, 0.5, 4, 43_300_000).map((ray) => ray31(ray, [REFLECTIVITY]));
    const once = turn(1, 0.5, 4, 43_200_000).map((ray) => ray31(ray, [REFLECTIVITY]));
    const file = openScan(written(volumeHeader(), ...once, ...again));
    expect(file.headers.map(({ startEpochMs }) => startEpochMs - noon)).toEqual([0, 100_000]);
  });
});

describe("message 1", () => {
  // Conversions of 2620002, table III-A: dBZ = code/2 - 33, m/s = code/2 - 64.5 or code - 129; angle = code/8 * 180/4096.
  const ninety = (90 / (180 / 4096)) * 8;
  const rays = (resolution: 2 | 4) =>
    Array.from({ length: 4 }, (_, index) =>
      ray1({
        msOfDay: 43_200_000 + index * 250,
        azimuthNumber: index + 1,
        azimuthCode: index * ninety,
        elevationCode: 11 * 8,
        elevationNumber: 1,
        status: [3, 1, 1, 2][index] as number,
        surveillance: { firstM: 0, gateM: 1000, codes: [0, 1, 2, 66, 166] },
        doppler: {
          firstM: -375,
          gateM: 250,
          velocity: [0, 1, 129, 149],
          width: [0, 1, 129, 133],
          resolution,
        },
      }),
    );
  const places = new Map([["ICAO-KZZZ", { lonDeg: -100.25, latDeg: 40.5, antennaHeightM: 520 }]]);

  test.each([
    [2, 10],
    [4, 20],
  ] as const)("at velocity resolution %i", (resolution, velocity) => {
    const path = written(volumeHeader("ARCHIVE2."), ...rays(resolution));
    const file = openScan(path, { places });
    expect(file.headers.map(({ origin, quantities }) => [origin.dataset, quantities.join(" ")])).toEqual([
      ["cut 1", "DBZH"],
      ["cut 1, VRADH WRADH", "VRADH WRADH"],
    ]);
    const [rain, wind] = [file.readSweep(0), file.readSweep(1)];
    expect(rain).toMatchObject({ firstGateCentreM: 0, gateLengthM: 1000, gateCount: 5, startEpochMs: noon });
    expect(rain.elevationDeg).toBeCloseTo((11 * 180) / 4096, 9);
    expect([...rain.azimuthDeg]).toEqual([0, 90, 180, 270]);
    expect(values(rain, "DBZH")).toEqual(REFLECTIVITIES);
    expect(wind).toMatchObject({ firstGateCentreM: -375, gateLengthM: 250, nyquistVelocityMPerS: 26.5 });
    expect(values(wind, "VRADH")).toEqual([Number.NEGATIVE_INFINITY, Number.NaN, 0, velocity]);
    expect(values(wind, "WRADH")).toEqual([Number.NEGATIVE_INFINITY, Number.NaN, 0, 2]);
  });

  test("does not say where its radar stands: that is asked for", () => {
    const error = fault(() => openScan(written(volumeHeader(), ...rays(2))));
    expect(error.what).toBe("the file does not say where radar KZZZ stands, as all of its age");
    expect(error.fix).toContain("ICAO-KZZZ");
  });

  test("a whole turn, gzipped, kept as a file", () => {
    const kept = fileURLToPath(new URL("../../../test/fixtures/level2-message1.gz", import.meta.url));
    expect(gunzipSync(readFileSync(kept))).toEqual(
      Buffer.concat([volumeHeader("ARCHIVE2."), ...evenMessage1Turn()]),
    );
    const sweep = sweepAt(kept, 0, { places });
    expect(sweep).toMatchObject({ rayCount: 360, gateCount: 40, remarks: [], raysReordered: 0 });
    // Code 146 is 40 dBZ.
    expect(values(sweep, "DBZH", 180)).toEqual(new Array(40).fill(40));
  });

  test("gzipped", () => {
    const path = written(gzipSync(Buffer.concat([volumeHeader("ARCHIVE2."), ...rays(2)])));
    expect(values(sweepAt(path, 0, { places }), "DBZH")).toEqual(REFLECTIVITIES);
  });
});

describe("bzip2 records", () => {
  // Compressed by bzip2 1.0.8 (J. Seward) from the bytes of smallVolume: one record for each 6 messages.
  const packed = fileURLToPath(new URL("../../../test/fixtures/level2-records.ar2v", import.meta.url));

  /** The fixture's records one by one. */
  function records(): readonly Buffer[] {
    const bytes = readFileSync(packed);
    const found: Buffer[] = [];
    for (let at = 24; at < bytes.length; ) {
      const end = at + 4 + Math.abs(bytes.readInt32BE(at));
      found.push(bytes.subarray(at, end));
      at = end;
    }
    return found;
  }

  test("a volume of four", () => {
    expect(records()).toHaveLength(4);
    checkSmallVolume(packed);
  });

  test("chunks in any order make the same volume, and so do their bytes in a row; alone they are refused", () => {
    const paths = records().map((bytes, index) =>
      written(...(index === 0 ? [volumeHeader(), bytes] : [bytes])),
    );
    expect(paths.map(isScanChunk)).toEqual([false, true, true, true]);
    const alone = fault(() => openScan(paths[1] as string));
    expect(alone.what).toBe("a chunk of a volume, with only a part of this turn: 2 rays");
    expect(alone.where).toMatch(/, cut 1$/);
    checkSmallVolume(written(...paths.map((path) => readFileSync(path))));
    const joined = openScanChunks(paths.toReversed());
    const whole = openScan(packed);
    expect(joined.headers.map(({ rayCount, remarks }) => [rayCount, remarks.length])).toEqual([
      [8, 0],
      [8, 0],
      [8, 0],
    ]);
    expect(joined.headers[0]?.origin.path).toBe(paths[0]);
    for (const index of [0, 1, 2]) {
      const [one, other] = [joined.readSweep(index), whole.readSweep(index)];
      expect({ ...one, origin: other.origin }).toEqual(other);
    }
  });

  test("chunks far apart in time or of two radars are not joined", () => {
    const [first] = records().map((bytes) => written(bytes));
    const later = written(
      volumeHeader(),
      ...turn(1, 0.5, 4, 50_000_000).map((ray) => ray31(ray, [REFLECTIVITY])),
    );
    expect(fault(() => openScanChunks([first as string, later])).what).toContain("a chunk is missing");
    const other = turn(1, 0.5, 4, 43_200_000).map((ray) => {
      const message = ray31(ray, [REFLECTIVITY]);
      message.write("KYYY", 28, "latin1");
      return message;
    });
    const header = volumeHeader();
    header.write("KYYY", 20, "latin1");
    expect(fault(() => openScanChunks([first as string, written(header, ...other)])).what).toContain(
      "chunks of several radars",
    );
  });

  test("a record that is damaged is named; whole records before a cut are read", () => {
    const bytes = readFileSync(packed);
    const damaged = Buffer.from(bytes);
    const at = 24 + (records()[0] as Buffer).length + 60;
    damaged.writeUInt8((damaged[at] as number) ^ 0xff, at);
    expect(fault(() => openScan(written(damaged))).where).toMatch(/KZZZ20310503_120000, record 2$/);
    const cut = openScan(written(bytes.subarray(0, bytes.length - 5)));
    expect(cut.remarks.map(({ what }) => what)).toEqual(["the file is cut short; what came before is read"]);
    expect(cut.headers.map(({ rayCount }) => rayCount)).toEqual([8, 8, 2]);
    expect(fault(() => openScan(written(bytes.subarray(0, 40)))).what).toContain(
      "cut short within its first record",
    );
  });

  test.skipIf(!FOREIGN_TOOLS)("compressed anew by bzip2 (skipped unless RAINRECKON_FOREIGN_TOOLS=1)", () => {
    const messages = smallVolume();
    const parts = [0, 6, 12, 18].map((from) =>
      record(bzip2(Buffer.concat(messages.slice(from, from + 6))), from === 18),
    );
    checkSmallVolume(written(volumeHeader(), ...parts));
    checkSmallVolume(written(bzip2(Buffer.concat([volumeHeader(), ...messages]))));
    // 64 MB of zeros pack into 50 bytes: refused before they take memory.
    const bomb = written(volumeHeader(), record(bzip2(Buffer.alloc(64_000_000))));
    expect(fault(() => openScan(bomb)).what).toBe("unpacks to more bytes than a radar volume can have");
    expect(fault(() => openScan(written(bzip2(Buffer.from("a letter"))))).what).toContain(
      "starts like a radar scan",
    );
  });

  test("a gzip file that grows beyond what a volume holds is refused", () => {
    const bomb = written(gzipSync(Buffer.concat([volumeHeader(), Buffer.alloc(20_000_000)]), { level: 9 }));
    expect(fault(() => openScan(bomb)).what).toBe("unpacks to more bytes than a radar volume can have");
  });
});

function bzip2(bytes: Buffer): Buffer {
  const { stdout, status } = spawnSync("bzip2", ["-9", "-c"], { input: bytes, maxBuffer: 1e8 });
  if (status !== 0) throw new Error("bzip2 did not succeed");
  return stdout;
}
