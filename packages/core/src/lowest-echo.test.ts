import { expect, test } from "vitest";
import { LowestEcho, measuredDetectableDbz, RANGE_BAND_M, scansDisprove } from "./lowest-echo.ts";
import type { Moment } from "./model/radar.ts";

const RAYS = 400;
const GATES = 60;
const SWEEP = { rayCount: RAYS, gateCount: GATES, firstGateCentreM: 1000, gateLengthM: 2000 };

/** A sweep whose weakest echo at each gate is -36 + 20 log10(r/km), by the square law, in steps of 0.5 dB. */
function noisySweep(change: (ray: number, gate: number, dbz: number) => number): Moment {
  const stored = new Float32Array(RAYS * GATES);
  for (let ray = 0; ray < RAYS; ray++) {
    for (let gate = 0; gate < GATES; gate++) {
      const weakest = -36 + 20 * Math.log10(1 + 2 * gate);
      stored[ray * GATES + gate] = change(ray, gate, weakest + (ray % 40));
    }
  }
  return { quantity: "DBZH", stored, gain: 1, offset: 0, nodata: 999, undetect: -999 };
}

test("the weakest echo by range, and the square law through it", () => {
  const echo = new LowestEcho();
  echo.add(
    SWEEP,
    noisySweep((_ray, _gate, dbz) => dbz),
    "x",
  );
  const measured = echo.measure()!;
  expect(measured.gateCount).toBe(RAYS * GATES);
  // Classes are half a dB wide and told by their lower edge.
  expect(measured.at1KmDbz).toBeGreaterThanOrEqual(-36.5);
  expect(measured.at1KmDbz).toBeLessThanOrEqual(-36);
  for (const gate of [0, 10, 59]) {
    const law = -36 + 20 * Math.log10(1 + 2 * gate);
    const own = measuredDetectableDbz(1000 + gate * 2000, measured);
    expect(own).toBeGreaterThan(law - 0.51);
    expect(own).toBeLessThanOrEqual(law + 1e-6);
  }
});

test("bands that hold strong rain only do not pass for a deaf radar", () => {
  const echo = new LowestEcho();
  echo.add(
    SWEEP,
    noisySweep((_ray, gate, dbz) => (gate % 3 === 0 ? dbz : Math.max(dbz, 20))),
    "x",
  );
  const measured = echo.measure()!;
  expect(measured.lowestDbz[1]).toBe(20);
  expect(Math.abs(measured.at1KmDbz + 36)).toBeLessThanOrEqual(0.5);
});

test("where weak echo was taken out of the files, sight ends there at every range", () => {
  const echo = new LowestEcho();
  echo.add(
    SWEEP,
    noisySweep((_ray, _gate, dbz) => (dbz < 5 ? -999 : dbz)),
    "x",
  );
  const measured = echo.measure()!;
  expect(measuredDetectableDbz(3000, measured)).toBe(5);
  expect(measuredDetectableDbz(90_000, measured)).toBe(5);
});

test("nodata and undetect are no echo; a band without enough echo follows the law", () => {
  const echo = new LowestEcho();
  echo.add(
    SWEEP,
    noisySweep((ray, gate, dbz) => (gate >= 30 ? (ray % 2 === 0 ? 999 : -999) : dbz)),
    "x",
  );
  const measured = echo.measure()!;
  expect(measured.gateCount).toBe(RAYS * 30);
  expect(measured.lowestDbz[40]).toBeNaN();
  const far = measuredDetectableDbz(41 * RANGE_BAND_M, measured);
  expect(far - measured.at1KmDbz).toBeCloseTo(20 * Math.log10(82), 9);
});

test("a few gates far below all others do not pass for sensitivity", () => {
  const echo = new LowestEcho();
  echo.add(
    SWEEP,
    noisySweep((ray, gate, dbz) => (ray === 7 && gate % 7 === 0 ? -45 : dbz)),
    "x",
  );
  const measured = echo.measure()!;
  expect(measured.at1KmDbz).toBeGreaterThan(-37);
});

test("codes of uint8 measure as their values do", () => {
  const values = noisySweep((_ray, _gate, dbz) => Math.round(dbz * 2) / 2);
  const codes = Uint8Array.from(values.stored as Float32Array, (dbz) => (dbz + 40) * 2);
  const [asFloats, asCodes] = [new LowestEcho(), new LowestEcho()];
  asFloats.add(SWEEP, values, "x");
  asCodes.add(SWEEP, { quantity: "DBZH", stored: codes, gain: 0.5, offset: -40, nodata: 255 }, "x");
  expect(asCodes.measure()).toEqual(asFloats.measure());
});

test("no echo measures nothing", () => {
  const echo = new LowestEcho();
  echo.add(
    SWEEP,
    noisySweep(() => -999),
    "x",
  );
  expect(echo.measure()).toBeUndefined();
  expect(new LowestEcho().measure()).toBeUndefined();
});

test("a stated noise figure falls where the scans hold much weaker echo", () => {
  const echo = new LowestEcho();
  echo.add(
    SWEEP,
    noisySweep((_ray, _gate, dbz) => dbz),
    "x",
  );
  const measured = echo.measure()!;
  expect(scansDisprove(0, measured)).toBe(true);
  expect(scansDisprove(-36, measured)).toBe(false);
  expect(scansDisprove(-45, measured)).toBe(false);
  expect(scansDisprove(0, undefined)).toBe(false);
});
