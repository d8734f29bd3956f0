import { readFileSync, writeFileSync } from "node:fs";
import { InputError } from "@rainreckon/core";
import { afterAll, beforeAll, expect, test } from "vitest";
import {
  DATASET,
  GATES,
  MOMENT,
  oneSweep,
  RAYS,
  ROOT,
  removeTemporary,
  temporaryPath,
  writeOdim,
} from "../../test/odim-fixture.ts";
import { formatsReady, openScan } from "./scan-formats.ts";

beforeAll(formatsReady);
afterAll(removeTemporary);

/** Numbers from mulberry32, a small generator in the public domain (T. Ettinger), seeded. */
function random(seed: number): () => number {
  let state = seed;
  return () => {
    state = (state + 0x6d2b79f5) | 0;
    let mixed = Math.imul(state ^ (state >>> 15), state | 1);
    mixed ^= mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61);
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 2 ** 32;
  };
}

const start = Array.from({ length: RAYS }, (_, ray) => ray * 45);
const content = {
  ...ROOT,
  datasets: [
    {
      ...DATASET,
      how: { startazA: start, stopazA: start.map((azimuth) => azimuth + 45), NI: 12 },
      data: [MOMENT, { ...MOMENT, what: { ...MOMENT.what, quantity: "TH" } }],
    },
  ],
};

/**
 * Reads everything in a file. The only error allowed is one that names the file; and what is read must be
 * consistent in itself: as many rays and gates as it says, in order, at times and places that can be.
 */
function readAll(path: string): "read" | "refused" {
  let refused = false;
  try {
    const file = openScan(path);
    try {
      file.inspect();
      file.headers.forEach((header, index) => {
        for (const quantity of header.quantities) {
          try {
            checkConsistent(file.readSweep(index, [quantity]));
          } catch (error) {
            refused = true;
            checkFault(error, path);
          }
        }
      });
      refused ||= file.leftOut.length > 0;
    } finally {
      file.close();
    }
  } catch (error) {
    refused = true;
    checkFault(error, path);
  }
  return refused ? "refused" : "read";
}

function checkFault(error: unknown, path: string): void {
  if (!(error instanceof InputError)) throw error;
  expect(error.where).toContain(path);
  expect(error.fix).not.toBe("");
}

function checkConsistent(sweep: ReturnType<ReturnType<typeof openScan>["readSweep"]>): void {
  expect(sweep.azimuthDeg).toHaveLength(sweep.rayCount);
  expect(sweep.rayTimeEpochMs).toHaveLength(sweep.rayCount);
  expect(sweep.rayElevationDeg).toHaveLength(sweep.rayCount);
  let before = 0;
  for (const azimuth of sweep.azimuthDeg) {
    expect(azimuth >= before && azimuth < 360).toBe(true);
    before = azimuth;
  }
  expect(sweep.rayTimeEpochMs.every(Number.isFinite)).toBe(true);
  expect(sweep.endEpochMs).toBeGreaterThanOrEqual(sweep.startEpochMs);
  expect(sweep.gateLengthM).toBeGreaterThan(0);
  for (const { stored, gain } of sweep.moments.values()) {
    expect(stored).toHaveLength(sweep.rayCount * sweep.gateCount);
    expect(gain).not.toBe(0);
    // Deflated arrays carry a checksum: rays may move with their azimuths, but no number changes.
    for (let ray = 0; ray < sweep.rayCount; ray++) {
      const gates = [...stored.slice(ray * GATES, (ray + 1) * GATES)];
      expect(gates).toEqual(Array.from({ length: GATES }, (_, gate) => gates[0] + gate));
    }
  }
}

test("a file cut short anywhere is refused", () => {
  const whole = readFileSync(writeOdim(content));
  const path = temporaryPath("cut.h5");
  for (let part = 0; part < 100; part++) {
    writeFileSync(path, whole.subarray(0, Math.floor((whole.length * part) / 100)));
    expect(readAll(path)).toBe("refused");
  }
});

test.each([
  ["oldest layout", ["earliest", "v110"], 1400],
  ["newest layout", ["v110", "v110"], 600],
] as const)(
  "bytes changed at random in the %s never crash, hang or make things up",
  (_name, libver, count) => {
    const whole = readFileSync(writeOdim(content, temporaryPath("scan.h5"), libver));
    const path = temporaryPath("changed.h5");
    const next = random(20_310_503);
    const outcomes = { read: 0, refused: 0 };
    for (let round = 0; round < count; round++) {
      const bytes = Buffer.from(whole);
      for (let change = 0; change <= round % 3; change++) {
        bytes[Math.floor(next() * bytes.length)] = Math.floor(next() * 256);
      }
      writeFileSync(path, bytes);
      outcomes[readAll(path)] += 1;
    }
    // Both happen: much of a file is padding and values that may be anything, the rest is structure.
    expect(outcomes.read).toBeGreaterThan(0);
    expect(outcomes.refused).toBeGreaterThan(0);
  },
);

test("the same file undamaged is read", () => {
  const path = writeOdim(content);
  expect(readAll(path)).toBe("read");
  const file = openScan(path);
  expect(file.readSweep(0, ["TH"]).moments.get("TH")?.stored).toHaveLength(RAYS * GATES);
  file.close();
  expect(readAll(writeOdim(oneSweep()))).toBe("read");
});
