import { expect, test } from "vitest";
import type { PolarEcho } from "../polar-echo.ts";
import { screenSweep } from "./screen-sweep.ts";
import { DRY, evenNumbers, type SweepSketch, screensAt, sketchSweep } from "./sketch.ts";
import type { LearnedStaticEcho } from "./static-echo.ts";
import { StaticEchoLearner } from "./static-echo-learner.ts";

const ONLY_LEARNED = {
  off: [
    "still-echo",
    "filtered-power",
    "low-correlation",
    "noisy-phase",
    "texture",
    "vertical-gradient",
    "spike",
    "clear-air",
    "speckle",
  ],
  fill: "none",
} as const;

function learn(rounds: number, sketch: (round: number) => SweepSketch): LearnedStaticEcho {
  const learner = new StaticEchoLearner();
  for (let round = 0; round < rounds; round++)
    learner.add(sketchSweep({ startEpochMs: 300_000 * round, ...sketch(round) }));
  return learner.finish();
}

function places(learned: LearnedStaticEcho): number {
  return learned.sweeps.reduce(
    (sum, sweep) => sum + sweep.static.places.length + sweep.points.places.length,
    0,
  );
}

const isHill = (ray: number, gate: number) => ray === 100 && (gate === 30 || gate === 31);
const flicker = (round: number, ray: number, gate: number) => ((round * 5 + ray * 3 + gate) % 7) - 3;
const hill = (round: number): SweepSketch => ({
  dbz: (ray, gate) => (isHill(ray, gate) ? 28 + flicker(round, ray, gate) : DRY),
});

test("echo that stays in place over dry rounds is learned, and taken where it is no stronger", () => {
  const learned = learn(12, hill);
  const dry = sketchSweep(hill(20));
  screenSweep(dry, undefined, learned, ONLY_LEARNED);
  expect(screensAt(dry, 100, 30)).toEqual(["static-echo", "fixed-point"]);
  expect(dry.dbz[100 * 60 + 30]).toBeNaN();

  // Rain of 45 dBZ is 17 dB stronger than the hill.
  const wet = sketchSweep({ dbz: () => 45 });
  screenSweep(wet, undefined, learned, ONLY_LEARNED);
  expect(wet.screenedBy.some((by) => by !== 0)).toBe(false);
});

test("seven rounds are too few to learn from, and the report says so", () => {
  const learned = learn(7, hill);
  expect(learned.sweeps).toEqual([]);
  const { couldNotRun } = screenSweep(sketchSweep(hill(0)), undefined, learned, ONLY_LEARNED);
  expect(couldNotRun).toEqual([
    { screen: "static-echo", lacking: "rounds to learn from" },
    { screen: "fixed-point", lacking: "rounds to learn from" },
  ]);
});

test("a turbine is a fixed point also while it rains around it", () => {
  const even = evenNumbers(3);
  const learned = learn(12, () => ({
    dbz: (ray, gate) => (ray === 50 && gate === 40 ? 40 + 12 * (even() - 0.5) : 15 + 4 * even()),
  }));
  expect(learned.sweeps[0]?.points.places).toEqual(Int32Array.of(50 * 60 + 40));
  const echo = sketchSweep({ dbz: (ray, gate) => (ray === 50 && gate === 40 ? 41 : 17) });
  screenSweep(echo, undefined, learned, ONLY_LEARNED);
  expect(screensAt(echo, 50, 40)).toContain("fixed-point");
  expect(screensAt(echo, 50, 41)).toEqual([]);
});

test("steady rain everywhere, for the whole run, is not learned", () => {
  const even = evenNumbers(5);
  const learned = learn(24, () => ({
    dbz: () => 25 + 3 * even(),
    velocityMPerS: () => 0,
    rhohv: () => 0.98,
  }));
  expect(places(learned)).toBe(0);
});

test("a shower that drifts 1.3 m/s at zero velocity is not learned", () => {
  // 24 rounds of 5 min: 9 km in all; a shower of 3 km.
  const learned = learn(24, (round) => ({
    dbz: (ray, gate) => {
      const rangeKm = 0.5 * gate + 0.25;
      const azimuth = ((ray + 0.5) * Math.PI) / 180;
      const eastKm = rangeKm * Math.sin(azimuth) - 20 - 0.39 * round;
      const northKm = rangeKm * Math.cos(azimuth) - 10;
      const dbz = 48 - 2.5 * (eastKm * eastKm + northKm * northKm);
      return dbz > 5 ? dbz : DRY;
    },
    velocityMPerS: () => 0.4,
    rhohv: () => 0.98,
  }));
  expect(places(learned)).toBe(0);
});

test("rain stands still where the wind blows across the beam, and is not learned; still echo in moving rain is", () => {
  // Wind from the west: the radial velocity changes sign in the north.
  const wind = (ray: number) => 10 * Math.sin(((ray + 0.5) * Math.PI) / 180);
  const learned = learn(12, () => ({
    dbz: () => 25,
    velocityMPerS: (ray, gate) => (ray === 90 && gate === 40 ? 0.2 : wind(ray)),
  }));
  expect(learned.sweeps[0]?.static.places).toEqual(Int32Array.of(90 * 60 + 40));
});

test("ground that is never seen dry, but correlates as no weather does, is learned", () => {
  const learned = learn(12, () => ({ dbz: () => 25, rhohv: (ray) => (ray === 7 ? 0.6 : 0.98) }));
  expect(learned.sweeps[0]?.static.places).toHaveLength(60);
});

test("sweeps in any order give the same", () => {
  const sketches = Array.from({ length: 12 }, (_, round) => ({
    ...hill(round),
    elevationDeg: round % 2 ? 1.5 : 0.5,
  }));
  const both = [...sketches, ...sketches];
  const of = (list: readonly SweepSketch[]) => {
    const learner = new StaticEchoLearner();
    for (const sketch of list) learner.add(sketchSweep(sketch));
    return learner.finish();
  };
  const there = of(both);
  expect(there.sweeps.map(({ elevationDeg, rounds }) => [elevationDeg, rounds])).toEqual([
    [0.5, 12],
    [1.5, 12],
  ]);
  expect(of(both.toReversed())).toEqual(there);
  expect(structuredClone(there)).toEqual(there);
});

test("rays that jitter about whole degrees, north included, keep their places", () => {
  const shown = (ray: number) => ray % 360 === 0;
  const around = (round: number): PolarEcho => {
    const jitterDeg = 0.15 * ((round % 3) - 1);
    const echo = sketchSweep({
      firstAzimuthDeg: 0,
      dbz: (ray, gate) => (shown(ray) && gate === 30 ? 30 : DRY),
    });
    if (jitterDeg >= 0) {
      for (let ray = 0; ray < 360; ray++) echo.azimuthDeg[ray] = ray + jitterDeg;
      return echo;
    }
    // The ray at north lies before it, and becomes the last of the list.
    const turned = sketchSweep({ dbz: (ray, gate) => (shown(ray + 1) && gate === 30 ? 30 : DRY) });
    for (let ray = 0; ray < 360; ray++) turned.azimuthDeg[ray] = ray + 1 + jitterDeg;
    return turned;
  };
  const learner = new StaticEchoLearner();
  for (let round = 0; round < 12; round++) learner.add(around(round));
  const learned = learner.finish();
  expect(learned.sweeps[0]?.static.places).toEqual(Int32Array.of(30));
  expect(learned.sweeps[0]?.static.share).toEqual(Float64Array.of(1));
  const turned = around(0);
  screenSweep(turned, undefined, learned, ONLY_LEARNED);
  expect(screensAt(turned, 359, 30)).toContain("static-echo");
});

test("what was learned of one geometry is not put on another", () => {
  const learned = learn(12, hill);
  const other = sketchSweep({ ...hill(0), gateLengthM: 250 });
  const { couldNotRun } = screenSweep(other, undefined, learned, ONLY_LEARNED);
  expect(couldNotRun.map(({ screen }) => screen)).toEqual(["static-echo", "fixed-point"]);
});
