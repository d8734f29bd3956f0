import { type PolarEcho, polarEcho, type Sweep, screenBit } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { OVERLAP_SETTINGS, OverlapSamples, type OverlapSweep } from "./overlap-samples.ts";

/** A sweep of one ray, its gates dealt to the cells of a row of ten: two gates a cell. */
function sweepOf(
  siteId: string,
  dbz: readonly number[],
  over: { readonly startEpochMs?: number; readonly heightM?: number; readonly distanceM?: number } = {},
): OverlapSweep & { readonly echo: PolarEcho } {
  const { startEpochMs = 0, heightM = 500, distanceM = 30_000 } = over;
  const sweep: Sweep = {
    site: { id: siteId, lonDeg: 3, latDeg: 52, antennaHeightM: 0 },
    origin: { path: siteId, dataset: "dataset1" },
    elevationDeg: 0.5,
    rayCount: 1,
    gateCount: dbz.length,
    firstGateCentreM: 250,
    gateLengthM: 500,
    startEpochMs,
    endEpochMs: startEpochMs + 20_000,
    quantities: ["DBZH"],
    remarks: [],
    azimuthDeg: Float64Array.of(90),
    rayElevationDeg: Float64Array.of(0.5),
    rayTimeEpochMs: Float64Array.of(startEpochMs),
    rayTimesDerived: true,
    raysReordered: 0,
    moments: new Map([
      [
        "DBZH",
        {
          quantity: "DBZH",
          stored: Float32Array.from(dbz),
          gain: 1,
          offset: 0,
          undetect: Number.NEGATIVE_INFINITY,
        },
      ],
    ]),
  };
  const cellCount = dbz.length / 2;
  const cells = Int32Array.from({ length: cellCount }, (_, k) => k);
  return {
    echo: polarEcho(sweep, "DBZH", siteId) as PolarEcho,
    distanceM: new Float32Array(cellCount).fill(distanceM),
    lookup: {
      cells,
      start: Int32Array.from({ length: cellCount + 1 }, (_, k) => 2 * k),
      gates: Int32Array.from(dbz.keys()),
      position: cells,
      beamHeightAslM: new Float32Array(cellCount).fill(heightM),
      weight: new Float32Array(cellCount).fill(1),
    },
  };
}

const rain = [20, 40, 30, 30];

describe("what two radars show of a cell", () => {
  test("is the mean of Z, not of dBZ, with phase and loss where they are known", () => {
    const samples = new OverlapSamples();
    const one = sweepOf("one", rain);
    one.echo.rainPhaseDeg = Float32Array.of(10, 20, 30, 40);
    one.echo.effectsDb.set("attenuation", Float32Array.of(1, 2, 3, 4));
    one.echo.twoWayLossDb = Float32Array.of(2, 3, 4, 5);
    samples.add(
      one,
      sweepOf("other", [30, 30, 30, 30], { startEpochMs: 120_000, heightM: 650, distanceM: 45_000 }),
    );
    const pairs = samples.finish()!;
    expect([pairs.oneSiteId, pairs.otherSiteId, pairs.count, pairs.seen]).toEqual(["one", "other", 2, 2]);
    // 20 and 40 dBZ average to 37.03 dBZ; by hand, 10 log10((100 + 10000) / 2).
    const first = pairs.oneDbz[0]! > 35 ? 0 : 1;
    expect(pairs.oneDbz[first]).toBeCloseTo(37.033, 3);
    expect(pairs.otherDbz[first]).toBeCloseTo(30, 4);
    expect([pairs.onePhaseDeg[first], pairs.oneAddedDb[first], pairs.oneLossDb[first]]).toEqual([
      15, 1.5, 2.5,
    ]);
    expect([pairs.otherPhaseDeg[first], pairs.otherAddedDb[first], pairs.otherLossDb[first]]).toEqual([
      Number.NaN,
      0,
      Number.NaN,
    ]);
    // 150 of 300 m apart, distances 30 and 45 km: a share of 0.2 of at most 0.25.
    expect(pairs.weight[first]).toBeCloseTo((1 - 0.25) * (1 - 0.4), 5);
    expect([pairs.heightAslM[first], pairs.epochMs[first]]).toEqual([575, 10_000]);
  });

  test.each([
    ["sweeps are too far apart in time", { startEpochMs: 200_000 }],
    ["beams are too far apart in height", { heightM: 900 }],
    ["distances are too different", { distanceM: 60_000 }],
  ])("is not taken where %s", (_, over) => {
    const samples = new OverlapSamples();
    samples.add(sweepOf("one", rain), sweepOf("other", rain, over));
    expect(samples.finish()).toBeUndefined();
  });

  test("is not taken where a gate is screened, not observed, or blocked, or neither shows rain", () => {
    const other = sweepOf("other", [...rain, 30, 30, 5, 5, 30, 30]);
    const one = sweepOf("one", [30, Number.NaN, 30, 30, 30, 30, 20, 20, 30, 30]);
    one.echo.screenedBy[2] = screenBit("speckle");
    one.echo.blockedFraction = Float32Array.of(0, 0, 0, 0, 0.3, 0, 0, 0, 0, 0);
    const samples = new OverlapSamples();
    samples.add(one, other);
    // Cells in order: not observed, screened, blocked, 12.5 dBZ on the mean, sound.
    expect(samples.finish()!.count).toBe(1);
  });
});

test("memory is bounded, and what is kept does not depend on the order of scans", () => {
  const settings = { ...OVERLAP_SETTINGS, maxSamples: 50 };
  const dbz = new Array<number>(40).fill(30);
  const pairs = Array.from({ length: 20 }, (_, round) => {
    const startEpochMs = round * 300_000;
    return [
      sweepOf("one", dbz, { startEpochMs }),
      sweepOf("other", dbz, { startEpochMs: startEpochMs + 60_000 }),
    ] as const;
  });
  const [forwards, backwards] = [new OverlapSamples(settings), new OverlapSamples(settings)];
  for (const [one, other] of pairs) forwards.add(one, other);
  for (const [one, other] of [...pairs].reverse()) backwards.add(one, other);
  const kept = forwards.finish()!;
  expect(backwards.finish()).toEqual(kept);
  expect(kept.seen).toBe(400);
  expect(kept.count).toBeLessThanOrEqual(50);
  expect(kept.count).toBeGreaterThan(10);
  expect(new Set(kept.epochMs).size).toBeGreaterThan(8);
});

test("an overlap is of two radars", () => {
  const samples = new OverlapSamples();
  expect(samples.finish()).toBeUndefined();
  expect(() => samples.add(sweepOf("one", rain), sweepOf("one", rain))).toThrow(RangeError);
  const another = new OverlapSamples();
  another.add(sweepOf("one", rain), sweepOf("other", rain));
  expect(() => another.add(sweepOf("other", rain), sweepOf("one", rain))).toThrow(/two radars/);
});
