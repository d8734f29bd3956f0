import { describe, expect, test } from "vitest";
import { equalAreaPlane } from "./earth.ts";
import { DEMO } from "./presets.ts";
import {
  type Coding,
  codingOf,
  encode,
  foldVelocity,
  measureSweep,
  RAY_COUNT,
  type RadarPlan,
  type SweepGeometry,
  type SweepMoments,
  sweepGeometry,
} from "./radar.ts";
import { noiseTable, RandomStream } from "./random.ts";
import { emptyMoment } from "./weather.ts";

const plane = equalAreaPlane({ lonDeg: 3, latDeg: 52.5 });
const table = noiseTable(new RandomStream(5));
const cBand = DEMO.radars.find(({ band }) => band === "C")!;
/** No melting layer within reach: the rain is the same at every height. */
const HIGH_LAYER = { bottomKm: 20, topKm: 21 };

function geometryOf(radar: RadarPlan, ridges = DEMO.ridges): SweepGeometry {
  return sweepGeometry(radar, 0.5, plane, ridges, HIGH_LAYER);
}

/** What a radar measures where the same rain falls everywhere. */
function measureUniform(
  radar: RadarPlan,
  geometry: SweepGeometry,
  z: number,
  kdpDegPerKm: number,
): SweepMoments {
  const lattice = { westKm: -200, southKm: -200, nx: 400, ny: 400 };
  const moment = emptyMoment(lattice, 0.5);
  moment.zMm6PerM3.fill(z);
  moment.phaseTimesWavelength.fill(kdpDegPerKm * radar.wavelengthM);
  moment.zdrDb.fill(1);
  return measureSweep(radar, geometry, lattice, moment, 0, { table, start: 3 });
}

/** Mean over the rays that see neither clutter nor a ridge, of one gate; NaN where all are undetect. */
function meanAt(
  stored: Uint8Array | Uint16Array,
  coding: Coding,
  geometry: SweepGeometry,
  gateCount: number,
  gate: number,
): number {
  let sum = 0;
  let count = 0;
  for (let ray = 0; ray < RAY_COUNT; ray++) {
    const index = ray * gateCount + gate;
    if (geometry.clutterZ[index]! > 0 || geometry.open[index]! < 1 || stored[index] === coding.undetect)
      continue;
    sum += stored[index]! * coding.gain + coding.offset;
    count += 1;
  }
  return sum / count;
}

describe("a radar in uniform rain", () => {
  const geometry = geometryOf(cBand);
  const kdp = 0.5;
  const measured = measureUniform(cBand, geometry, 1e4, kdp);
  const reflectivityAt = (gate: number): number =>
    meanAt(measured.DBZH, codingOf("DBZH", cBand), geometry, cBand.gateCount, gate);
  const phaseAt = (gate: number): number =>
    meanAt(measured.PHIDP, codingOf("PHIDP", cBand), geometry, cBand.gateCount, gate);

  // KDP is one-way and PHIDP two-way (Bringi and Chandrasekar 2001): a rise of 2 KDP dr.
  test("PHIDP rises by twice KDP times the way", () => {
    expect(Math.abs(phaseAt(90) - phaseAt(30) - 2 * kdp * 60)).toBeLessThan(0.5);
  });

  test("reflectivity falls by the loss per degree, on top of 40 dBZ and the calibration offset", () => {
    for (const gate of [10, 50, 90]) {
      const lossDb = cBand.lossDbPerDeg * 2 * kdp * (gate + 0.5) * (cBand.gateM / 1000);
      expect(Math.abs(reflectivityAt(gate) - (40 + cBand.calibrationOffsetDb - lossDb))).toBeLessThan(0.2);
    }
  });
});

// dBZmin(r) = dBZ0 + 20 log10(r/km): -40 dBZ at 1 km is 0 dBZ at 100 km (published/radar-physics.json, a).
test("rain of 0 dBZ is seen to 100 km by a radar that sees -40 dBZ at 1 km, and not beyond", () => {
  const radar = { ...cBand, noiseDbzAt1Km: -40 };
  const geometry = geometryOf(radar, []);
  const { DBZH } = measureUniform(radar, geometry, 1, 0);
  const seen = (gate: number): number => {
    let rays = 0;
    for (let ray = 0; ray < RAY_COUNT; ray++) if (DBZH[ray * radar.gateCount + gate] !== 0) rays += 1;
    return rays;
  };
  expect(seen(98)).toBe(RAY_COUNT);
  expect(seen(101)).toBe(0);
});

test("behind the ridge the lowest sweep loses what the terrain takes, and the next one hardly anything", () => {
  const low = geometryOf(cBand);
  const high = sweepGeometry(cBand, 1.4, plane, DEMO.ridges, HIGH_LAYER);
  const behind = (geometry: SweepGeometry, azimuthDeg: number): number =>
    geometry.open[(azimuthDeg + 1) * cBand.gateCount - 1]!;
  expect(behind(low, 249)).toBeLessThan(0.05);
  expect(behind(high, 249)).toBeGreaterThan(0.85);
  expect(behind(low, 100)).toBe(1);
});

test("ground echo stands in TH, and only in part in DBZH", () => {
  const geometry = geometryOf(cBand);
  const { TH, DBZH } = measureUniform(cBand, geometry, 0, 0);
  const gates = TH.filter((code) => code > 0).length;
  const left = DBZH.filter((code) => code > 0).length;
  expect(gates).toBeGreaterThan(500);
  expect(left).toBeGreaterThan(0);
  expect(DBZH.every((code, i) => code <= TH[i]!)).toBe(true);
});

test("stored numbers stay off the codes of undetect and nodata", () => {
  const coding = { gain: 0.5, offset: -32, nodata: 255, undetect: 0 };
  expect(encode(-100, coding)).toBe(1);
  expect(encode(200, coding)).toBe(254);
  expect(encode(8, coding)).toBe(80);
});

test.each([
  [3, 3],
  [17, -15],
  [-17, 15],
  [40, 8],
])("a velocity of %d m/s shows as %d with a Nyquist velocity of 16", (wind, shown) => {
  expect(foldVelocity(wind, 16)).toBeCloseTo(shown, 12);
});
