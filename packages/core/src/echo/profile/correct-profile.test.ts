import { expect, test } from "vitest";
import { echoOf } from "../blockage/echo-fixture.ts";
import { markBit, type PolarEcho } from "../polar-echo.ts";
import { RAIN_TYPE } from "../rain-type/steiner.ts";
import { correctProfile, PROFILE_DEFAULTS } from "./correct-profile.ts";
import { groundDbz, type LayeredRain, roundOf } from "./layered-rain.ts";
import type { LearnedProfile, MeltingLayer } from "./learned-profile.ts";
import type { VerticalProfile } from "./vertical-profile.ts";

/** The test profile of the check values of vertical profiles (`vpr-*`): bottom 2.3, peak 2.65, top 3.0 km. */
const profile: VerticalProfile = {
  bottomM: 2300,
  peakM: 2650,
  topM: 3000,
  peakDb: 6,
  slopeAboveDbPerKm: -4.5,
  slopeBelowDbPerKm: 0,
};
const layer: MeltingLayer = { bottomM: 2300, topM: 3000, basis: "scans", uncertaintyM: 50 };
const learned: LearnedProfile = {
  basis: "measured",
  reason: "planted",
  layer,
  profile,
  pairCount: 0,
  misfitDb: 0,
};
const nothing: LearnedProfile = { basis: "none", reason: "planted", pairCount: 0, misfitDb: Number.NaN };

/** One ray straight up, gates of 100 m: gate k has its centre at antenna + 50 + 100 k m, and hardly any width. */
function upright(antennaHeightM: number, rhohv?: (gate: number) => number): PolarEcho {
  const made = echoOf({
    elevationDeg: 90,
    rayCount: 1,
    gateCount: 80,
    gateLengthM: 100,
    dbz: () => 20,
    ...(rhohv === undefined ? {} : { rhohv: (_: number, gate: number) => rhohv(gate) }),
  });
  return { ...made, header: { ...made.header, site: { ...made.header.site, antennaHeightM } } };
}

function added(echo: PolarEcho, gate: number): number {
  return echo.effectsDb.get("profile")?.[gate] ?? 0;
}

test("a beam straight up is corrected by the profile at its height", () => {
  const echo = upright(0);
  const report = correctProfile(echo, learned, undefined);
  expect(added(echo, 19)).toBeCloseTo(0, 6);
  // 2.45 km: 150 m above the bottom of a rise of 6 dB in 350 m; the gate's own 100 m hardly matter.
  expect(added(echo, 24)).toBeCloseTo(-(150 / 350) * 6, 1);
  expect(added(echo, 34)).toBeCloseTo(4.5 * 0.45, 2);
  expect(added(echo, 49)).toBeCloseTo(4.5 * 1.95, 2);
  expect(echo.dbz[49]).toBeCloseTo(20 + 4.5 * 1.95, 2);
  expect(echo.measuredDbz[49]).toBe(20);
  expect(report.basis).toBe("measured");
});

test("what needs more than the limit is not observed, dry or wet, rain of either type", () => {
  const echo = upright(0);
  echo.dbz[70] = Number.NEGATIVE_INFINITY;
  const types = new Uint8Array(80).fill(RAIN_TYPE.stratiform);
  types[75] = RAIN_TYPE.convective;
  const report = correctProfile(echo, learned, types);
  // 10 dB at 4.5 dB/km above 3.0 km: 5222 m; the gate at 5150 m is the last below it.
  expect(echo.dbz[51]).toBeCloseTo(20 + 4.5 * 2.15, 2);
  for (const gate of [52, 70, 75]) expect(echo.dbz[gate]).toBeNaN();
  expect([...report.lostGates]).toEqual([28]);
  expect([...report.wetGates]).toEqual([52]);
});

test("a limit on what is taken away holds too", () => {
  const echo = upright(0);
  correctProfile(echo, learned, undefined, { ...PROFILE_DEFAULTS, largestCorrectionDb: 3 });
  expect(added(echo, 26)).toBe(-3);
});

test("dry stays dry, and what was not observed stays so", () => {
  const echo = upright(0);
  echo.dbz.fill(Number.NEGATIVE_INFINITY);
  echo.dbz[26] = Number.NaN;
  const report = correctProfile(echo, learned, undefined);
  expect(echo.dbz[25]).toBe(Number.NEGATIVE_INFINITY);
  expect(echo.dbz[26]).toBeNaN();
  expect([...report.wetGates]).toEqual([0]);
  expect(report.addedDb[0]).toBe(0);
});

test("a higher antenna meets the layer at a shorter range", () => {
  const [low, high] = [upright(0), upright(500)];
  correctProfile(low, learned, undefined);
  correctProfile(high, learned, undefined);
  for (const gate of [10, 19, 21, 30, 40]) expect(added(high, gate)).toBeCloseTo(added(low, gate + 5), 6);
});

test("showers keep their value above the layer; within it their type is worth half", () => {
  const echo = upright(0);
  correctProfile(echo, learned, new Uint8Array(80).fill(RAIN_TYPE.convective));
  expect(added(echo, 35)).toBe(0);
  // Peak at 2.65 km: half of the rain with 6 dB, half without: 10 log10((10^0.6 + 1) / 2) = 3.96 dB.
  expect(added(echo, 26)).toBeCloseTo(-3.9, 0);
});

test("showers get the profile by the share that was measured", () => {
  const echo = upright(0);
  correctProfile(echo, { ...learned, convectiveShare: 0.25 }, new Uint8Array(80).fill(RAIN_TYPE.convective));
  // 4.05 km: 1.05 km of snow, -4.725 dB, in a quarter of the rain: 10 log10(0.75 + 0.25 * 10^-0.4725) = -0.788 dB.
  expect(added(echo, 40)).toBeCloseTo(0.788, 2);
});

test("RHOHV decides over the type where the beam is in the layer", () => {
  const known = { ...learned, layer: { ...layer, correlation: { inRain: 0.99, drop: 0.08 } } };
  const fallen = (gate: number) => (gate >= 23 && gate < 30 ? 0.91 : 0.99);
  const shower = upright(0, fallen);
  correctProfile(shower, known, new Uint8Array(80).fill(RAIN_TYPE.convective));
  const plain = upright(0);
  correctProfile(plain, learned, undefined);
  expect(Math.abs(added(shower, 26) - added(plain, 26))).toBeLessThan(0.15);

  const whole = upright(0, () => 0.99);
  correctProfile(whole, known, new Uint8Array(80).fill(RAIN_TYPE.stratiform));
  expect(Math.abs(added(whole, 26))).toBeLessThan(0.15);
  // Above the layer RHOHV says nothing: the type alone decides.
  expect(added(whole, 40)).toBeCloseTo(added(plain, 40), 3);

  const missing = upright(0, () => Number.NaN);
  correctProfile(missing, known, undefined);
  expect(added(missing, 26)).toBeCloseTo(added(plain, 26), 6);
});

test("most of the beam in the layer is marked as melting, above it as snow, showers not at all", () => {
  const echo = upright(0);
  const types = new Uint8Array(80).fill(RAIN_TYPE.stratiform);
  types[40] = RAIN_TYPE.convective;
  const report = correctProfile(echo, learned, types);
  const [melting, snow] = [markBit("melting"), markBit("snow")];
  expect(Array.from(echo.marks.subarray(21, 25))).toEqual([0, 0, melting, melting]);
  expect(Array.from(echo.marks.subarray(28, 32))).toEqual([melting, melting, snow, snow]);
  expect(echo.marks[40]).toBe(0);
  expect(report.meltingGates).toBe(7);
  // 3.05 to 5.15 km are 22 gates, less the shower.
  expect(report.snowGates).toBe(21);
});

test("where there is no layer, or none within reach, nothing changes", () => {
  const rain: LayeredRain = { profile: { ...profile, peakDb: 0, slopeAboveDbPerKm: 0 }, rhohvDrop: 0 };
  for (const known of [
    nothing,
    { ...learned, profile: { ...profile, bottomM: 9000, peakM: 9300, topM: 9600 } },
  ]) {
    for (const echo of roundOf(rain, 0)) {
      const before = echo.dbz.slice();
      const report = correctProfile(echo, known, undefined);
      expect(echo.dbz).toEqual(before);
      expect(echo.effectsDb.size).toBe(0);
      expect(echo.marks.some((mark) => mark !== 0)).toBe(false);
      expect(report.wetGates.reduce((sum, n) => sum + n, 0)).toBe(before.length);
      expect(report.addedDb.every((db) => db === 0)).toBe(true);
    }
  }
});

// What beams of a planted profile see comes back to the rain that was planted, noise of 0.7 dB apart.
test.each([0.5, 1, 2, 3])(
  "a beam of %d degrees is brought back to the rain at the ground",
  (beamWidthDeg) => {
    for (const echo of roundOf({ profile, beamWidthDeg, antennaHeightM: 300, gateCount: 60 }, 3)) {
      const report = correctProfile(echo, learned, undefined);
      const { gateCount, rayCount } = echo.header;
      for (let gate = 0; gate < gateCount; gate++) {
        let sum = 0;
        for (let ray = 0; ray < rayCount; ray++) {
          sum += (echo.dbz[ray * gateCount + gate] as number) - groundDbz(ray, gate + 0.5, 3);
        }
        // Means of 180 gates: four standard errors are 0.21 dB.
        if (!Number.isNaN(sum)) expect(Math.abs(sum / rayCount)).toBeLessThan(0.25);
      }
      const bands = report.wetGates.length;
      expect(bands).toBe(6);
      expect(
        report.wetGates.reduce((a, b) => a + b) + report.lostGates.reduce((a, b) => a + b),
      ).toBeGreaterThan(0);
    }
  },
);

test("the report adds up to what was added", () => {
  const [, , , high] = roundOf({ profile, gateCount: 50 }, 1);
  if (high === undefined) throw new Error("no sweep");
  const report = correctProfile(high, learned, undefined);
  const db = high.effectsDb.get("profile") as Float32Array;
  for (let band = 0; band < 5; band++) {
    const inBand = Array.from(db).filter((_, at) => Math.floor((at % 50) / 10) === band);
    const observed = inBand.filter((value) => !Number.isNaN(value));
    expect(report.lostGates[band]).toBe(inBand.length - observed.length);
    expect(report.addedDb[band]).toBeCloseTo(
      observed.reduce((sum, value) => sum + value, 0),
      1,
    );
    const largest = observed.reduce((most, value) => (Math.abs(value) > Math.abs(most) ? value : most), 0);
    expect(report.largestDb[band]).toBeCloseTo(largest, 5);
  }
});
