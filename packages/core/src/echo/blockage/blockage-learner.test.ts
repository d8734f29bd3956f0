import { expect, test } from "vitest";
import { screenBit } from "../polar-echo.ts";
import { BlockageLearner, type LearnedBlockage } from "./blockage-learner.ts";
import { correctBlockage } from "./correct-blockage.ts";
import { echoOf, noiseOf } from "./echo-fixture.ts";

/** Rain that grows by 25 dB from west to east and moves, seen by two sweeps, with 1.5 dB of noise in each gate. */
function learned(
  lossDb: (ray: number, gate: number) => number,
  options: { readonly rounds?: number; readonly dry?: boolean; readonly dampAbove?: boolean } = {},
): LearnedBlockage {
  const learner = new BlockageLearner();
  const noise = noiseOf(7);
  for (let round = 0; round < (options.rounds ?? 10); round++) {
    const rainDbz = (ray: number, gate: number) =>
      options.dry === true
        ? Number.NEGATIVE_INFINITY
        : 35 + 12.5 * Math.sin((ray * Math.PI) / 180) + 3 * Math.sin(gate / 7 + round + ray / 40);
    for (const elevationDeg of [0.5, 1.3]) {
      const isLow = elevationDeg < 1;
      const dbz = (ray: number, gate: number) => {
        // The upper sweep sees 2 dB less everywhere: a vertical profile, no obstacle.
        const shown = rainDbz(ray, gate) - (isLow ? lossDb(ray, gate) : 2) + 1.5 * noise();
        return shown < 5 ? Number.NEGATIVE_INFINITY : shown;
      };
      learner.add(echoOf({ elevationDeg, dbz, startEpochMs: round * 300_000 + (isLow ? 0 : 60_000) }));
    }
  }
  return learner.finish();
}

test("a sector across north that loses 4 dB behind 12 km is found, and nothing else in a strong gradient of rain", () => {
  const isBlocked = (ray: number) => ray < 6 || ray >= 354;
  const { sweeps } = learned((ray, gate) => (isBlocked(ray) && gate >= 12 ? 4 : 0));
  expect(sweeps.map(({ elevationDeg, roundCount }) => [elevationDeg, roundCount])).toEqual([[0.5, 10]]);
  const [low] = sweeps;
  for (let ray = 0; ray < 360; ray++) {
    if (isBlocked(ray)) {
      expect(Math.abs(low!.lossDb[ray]! - 4)).toBeLessThan(4 * low!.standardErrorDb[ray]!);
      expect(Math.abs(low!.fromRangeM[ray]! - 12_000)).toBeLessThanOrEqual(2000);
      expect(low!.standardErrorDb[ray]).toBeLessThan(1);
    } else {
      expect(low!.lossDb[ray]).toBe(0);
    }
  }
});

test("a sector that shows nothing at all loses more than is ever corrected", () => {
  const { sweeps } = learned((ray, gate) => (ray >= 80 && ray < 90 && gate >= 8 ? 60 : 0));
  for (let ray = 80; ray < 90; ray++) expect(sweeps[0]!.lossDb[ray]).toBeGreaterThan(10);
  expect(sweeps[0]!.lossDb[95]).toBe(0);
});

test("a loss that comes and goes is no obstacle", () => {
  let calls = 0;
  const { sweeps } = learned((ray) =>
    ray >= 100 && ray < 110 && Math.floor(calls++ / 400) % 5 === 0 ? 9 : 0,
  );
  expect(calls).toBeGreaterThan(0);
  expect([...sweeps[0]!.lossDb.slice(100, 110)]).toEqual(new Array(10).fill(0));
});

test("too few rounds, or no rain, tell nothing", () => {
  for (const { sweeps } of [learned(() => 0, { rounds: 3 }), learned(() => 0, { dry: true })]) {
    expect(sweeps[0]!.lossDb.every(Number.isNaN)).toBe(true);
  }
});

test("a single sweep, and sweeps of two radars, are not compared", () => {
  const learner = new BlockageLearner();
  learner.add(echoOf({ elevationDeg: 0.5, dbz: () => 30 }));
  learner.add(echoOf({ elevationDeg: 1.3, dbz: () => 30, siteId: "another" }));
  expect(learner.finish().sweeps).toEqual([]);
});

test("the result can be cloned, and is the same whichever round comes first", () => {
  const one = learned((ray, gate) => (ray < 9 && gate > 9 ? 3 : 0));
  expect(structuredClone(one)).toEqual(one);
  const rounds = [0, 1, 2, 3, 4].map((round) =>
    [0.5, 1.3].map((elevationDeg) =>
      echoOf({
        elevationDeg,
        startEpochMs: round * 300_000,
        dbz: (ray, gate) =>
          30 + ((ray * 7 + gate * 3 + round * round) % 5) - elevationDeg * (ray < 9 ? -2 : 0),
      }),
    ),
  );
  const [forwards, backwards] = [new BlockageLearner(), new BlockageLearner()];
  for (const echo of rounds.flat()) forwards.add(echo);
  for (const echo of [...rounds].reverse().flat()) backwards.add(echo);
  expect(backwards.finish()).toEqual(forwards.finish());
});

test("what was corrected already is found again, and screened gates do not count", () => {
  const learner = new BlockageLearner();
  for (let round = 0; round < 8; round++) {
    for (const elevationDeg of [0.5, 1.3]) {
      const echo = echoOf({
        elevationDeg,
        startEpochMs: round * 300_000,
        dbz: (ray) => 30 - (ray < 10 && elevationDeg < 1 ? 3 : 0) + ((ray * 7 + round * 3) % 5) / 10,
      });
      if (elevationDeg < 1) {
        correctBlockage(echo, new Float32Array(echo.dbz.length).fill(0.5));
        for (let gate = 20 * 40; gate < 30 * 40; gate++) echo.screenedBy[gate] = screenBit("static-echo");
      }
      learner.add(echo);
    }
  }
  const { lossDb } = learner.finish().sweeps[0]!;
  expect(lossDb[5]).toBeCloseTo(3, 1);
  expect(lossDb[25]).toBeNaN();
  expect(lossDb[40]).toBe(0);
});
