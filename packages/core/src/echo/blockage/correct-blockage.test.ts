import { expect, test } from "vitest";
import { markBit } from "../polar-echo.ts";
import type { LearnedBlockage } from "./blockage-learner.ts";
import { correctBlockage, joinBlockage } from "./correct-blockage.ts";
import { echoOf } from "./echo-fixture.ts";

const DRY = Number.NEGATIVE_INFINITY;
const UNKNOWN = Number.NaN;

test("half a beam gives back 3.01 dB; above the limit wet and dry gates alike are not observed", () => {
  const dbz = [20, DRY, 20, DRY, UNKNOWN, 20];
  const echo = echoOf({ elevationDeg: 0.5, rayCount: 1, gateCount: 6, dbz: (_, gate) => dbz[gate]! });
  const share = Float32Array.of(0.5, 0.5, 0.8, 0.8, 0.5, UNKNOWN);
  expect(correctBlockage(echo, share)).toEqual({ corrected: 3, lost: 2 });
  // By hand: 20 - 10 log10(0.5).
  expect(echo.dbz[0]).toBeCloseTo(23.0103, 4);
  expect([...echo.dbz.slice(1)]).toEqual([DRY, UNKNOWN, UNKNOWN, UNKNOWN, 20]);
  expect([...echo.marks]).toEqual([0, 0, markBit("blocked"), markBit("blocked"), 0, 0]);
  expect(echo.blockedFraction).toBe(share);
  expect(echo.effectsDb.get("blockage")![0]).toBeCloseTo(3.0103, 4);
  expect([...echo.measuredDbz]).toEqual(dbz);
});

test("a beam that nothing stands in is left as it is, and nothing is written down", () => {
  const echo = echoOf({ elevationDeg: 0.5, rayCount: 1, gateCount: 3, dbz: () => 20 });
  expect(correctBlockage(echo, new Float32Array(3))).toEqual({ corrected: 0, lost: 0 });
  expect(echo.effectsDb.size).toBe(0);
});

test("the limit is the setting's, and still corrected itself", () => {
  const echo = echoOf({ elevationDeg: 0.5, rayCount: 1, gateCount: 2, dbz: () => 20 });
  expect(correctBlockage(echo, Float32Array.of(0.5, 0.625), { maxFraction: 0.5 })).toEqual({
    corrected: 1,
    lost: 1,
  });
});

test("terrain speaks; scans where it is silent, or where they differ by more than two standard errors", () => {
  const blank = () => new Float32Array(360);
  const learned: LearnedBlockage = {
    sweeps: [
      {
        elevationDeg: 0.5,
        roundCount: 20,
        lossDb: blank(),
        standardErrorDb: blank().fill(0.5),
        fromRangeM: blank(),
        toRangeM: blank().fill(3000),
      },
    ],
  };
  const [sweep] = learned.sweeps;
  // Rays: 3 dB from 1.6 km in both; the scans see 6 dB; the scans see nothing; terrain is not known; neither knows.
  sweep!.lossDb.set([3.2, 6, 0, 3, UNKNOWN]);
  sweep!.fromRangeM.set([1600, 1600, 0, 1600, 0]);
  const geometry = {
    elevationDeg: 0.52,
    azimuthDeg: Float64Array.of(0.5, 1.5, 2.5, 3.5, 4.5),
    gateCount: 4,
    firstGateCentreM: 500,
    gateLengthM: 1000,
  };
  const half = [0, 0, 0.5, 0.5];
  const terrain = Float32Array.from([...half, ...half, ...half, ...new Array(8).fill(UNKNOWN)]);
  const joined = joinBlockage(geometry, terrain, learned);
  const quarter = 1 - 10 ** -0.6;
  const byScans = 1 - 10 ** -0.3;
  const expected = [
    ...half,
    ...[0, 0, quarter, quarter],
    // Beyond 3 km there was no rain to tell by: terrain speaks again.
    ...[0, 0, 0, 0.5],
    ...[0, 0, byScans, byScans],
    ...new Array(4).fill(UNKNOWN),
  ];
  expect(joined.fraction).toEqual(Float32Array.from(expected));
  expect([joined.gatesByTerrain, joined.gatesByScans, joined.gatesUnknown]).toEqual([9, 7, 4]);
  expect(joinBlockage(geometry, terrain, undefined).fraction).toEqual(terrain);
  expect(joinBlockage({ ...geometry, elevationDeg: 1.5 }, undefined, learned).gatesUnknown).toBe(20);
});
