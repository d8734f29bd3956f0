import { readFileSync, writeFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { gzipSync } from "node:zlib";
import { InputError, type Sweep } from "@rainreckon/core";
import { afterAll, beforeAll, expect, test } from "vitest";
import { evenMessage1Turn, smallVolume, volumeHeader } from "../../test/level2-bytes.ts";
import { mutant, random } from "../../test/mutations.ts";
import { removeTemporary, temporaryPath } from "../../test/odim-fixture.ts";
import { formatsReady, openScan, recogniseScan } from "./scan-formats.ts";

beforeAll(formatsReady);
afterAll(removeTemporary);

const fixture = (name: string) =>
  readFileSync(fileURLToPath(new URL(`../../test/fixtures/${name}`, import.meta.url)));

const SAMPLES = {
  "CfRadial 1 as NetCDF-3": () => [fixture("cfradial1-classic.nc"), fixture("cfradial1-ragged.nc")],
  "CfRadial 1 as NetCDF-4": () => [fixture("cfradial1-ragged-hdf5.nc")],
  "CfRadial 2": () => [fixture("cfradial2.nc")],
  "Archive Level II, plain and gzip": () => {
    const plain = Buffer.concat([volumeHeader(), ...smallVolume()]);
    const old = Buffer.concat([volumeHeader("ARCHIVE2."), ...evenMessage1Turn().slice(0, 3)]);
    return [plain, old, gzipSync(plain)];
  },
  "Archive Level II, bzip2 records": () => [fixture("level2-records.ar2v")],
} as const;

/** Message 1 does not say where its radar stands. */
const places = new Map([["ICAO-KZZZ", { lonDeg: -100.25, latDeg: 40.5, antennaHeightM: 520 }]]);
const MUTATIONS = 2000;
const LONGEST_MS = 5000;

/**
 * Opens and reads everything. Whatever was changed, there are two ways out: an InputError that names the file and
 * says what to do, or sweeps that are consistent in themselves.
 */
function readAll(path: string): "read" | "refused" {
  let refused = false;
  const attempt = (work: () => void) => {
    try {
      work();
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      expect(error.where).toContain(path);
      expect(error.fix).not.toBe("");
      refused = true;
    }
  };
  attempt(() => {
    const file = openScan(path, { places });
    try {
      refused ||= file.inspect().length > 0;
      file.headers.forEach((header, index) => {
        for (const quantity of header.quantities) attempt(() => mustHold(file.readSweep(index, [quantity])));
      });
    } finally {
      file.close();
    }
  });
  return refused ? "refused" : "read";
}

function mustHold(sweep: Sweep): void {
  const { rayCount, gateCount, azimuthDeg, rayElevationDeg, rayTimeEpochMs } = sweep;
  let sound =
    rayCount >= 1 &&
    gateCount >= 1 &&
    azimuthDeg.length === rayCount &&
    rayElevationDeg.length === rayCount &&
    rayTimeEpochMs.length === rayCount &&
    rayTimeEpochMs.every(Number.isFinite) &&
    rayElevationDeg.every((angle) => angle >= -10 && angle <= 90) &&
    sweep.gateLengthM > 0 &&
    sweep.endEpochMs >= sweep.startEpochMs &&
    sweep.endEpochMs - sweep.startEpochMs <= 3_600_000 &&
    Math.abs(sweep.site.latDeg) <= 90 &&
    Math.abs(sweep.site.lonDeg) <= 180;
  let before = 0;
  for (const azimuth of azimuthDeg) {
    sound &&= azimuth >= before && azimuth < 360;
    before = azimuth;
  }
  for (const { stored, gain, offset } of sweep.moments.values()) {
    sound &&=
      stored.length === rayCount * gateCount &&
      gain !== 0 &&
      Number.isFinite(gain) &&
      Number.isFinite(offset);
  }
  if (!sound) expect(sweep).toBe("a sweep that holds together");
}

test.each(Object.entries(SAMPLES))(
  "%s: changed, cut short and overwritten files never crash, hang or contradict themselves",
  (_, make) => {
    const samples = make();
    const next = random(20_310_503);
    const path = temporaryPath("changed");
    const outcomes = { read: 0, refused: 0 };
    let recognised = 0;
    let longestMs = 0;
    for (let round = 0; round < MUTATIONS; round++) {
      // Two in three leave the head alone, so that they get past the magic check.
      const bytes = mutant(samples[round % samples.length] as Buffer, next, round % 3 === 0 ? 0 : 24);
      writeFileSync(path, bytes);
      if (recogniseScan(path) !== undefined) recognised += 1;
      const before = performance.now();
      outcomes[readAll(path)] += 1;
      longestMs = Math.max(longestMs, performance.now() - before);
    }
    expect(longestMs).toBeLessThan(LONGEST_MS);
    expect(recognised).toBeGreaterThan(MUTATIONS / 3);
    // Both happen: some bytes are values or padding, the rest is structure.
    expect(outcomes.read).toBeGreaterThan(0);
    expect(outcomes.refused).toBeGreaterThan(0);
  },
);

test.each(Object.entries(SAMPLES))("%s: undamaged, it is read", (_, make) => {
  for (const [index, bytes] of make().entries()) {
    const path = temporaryPath(`whole-${index}`);
    writeFileSync(path, bytes);
    const file = openScan(path, { places });
    expect(file.headers.length).toBeGreaterThan(0);
    expect(file.inspect()).toEqual([]);
    file.close();
  }
});

test.each(["cfradial1-classic.nc", "cfradial2.nc", "level2-records.ar2v"])(
  "%s cut short at any byte",
  (name) => {
    const whole = fixture(name);
    const path = temporaryPath("cut");
    const step = Math.ceil(whole.length / 400);
    for (let length = 0; length < whole.length; length += step) {
      writeFileSync(path, whole.subarray(0, length));
      const outcome = readAll(path);
      // Whole records of a volume that is still being sent are read; half an array never is.
      if (!name.endsWith(".ar2v")) expect(`${outcome} at ${length}`).toBe(`refused at ${length}`);
    }
  },
);
