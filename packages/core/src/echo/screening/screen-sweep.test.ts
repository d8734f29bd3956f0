import { describe, expect, test } from "vitest";
import { markBit, type PolarEcho, SCREENS, type Screen, screenBit } from "../polar-echo.ts";
import { screenSweep } from "./screen-sweep.ts";
import { DEFAULT_SCREENING, firstScreenOf, type ScreeningReport } from "./settings.ts";
import { DRY, evenNumbers, rainMoments, type SweepSketch, screensAt, sketchSweep } from "./sketch.ts";
import { StaticEchoLearner } from "./static-echo-learner.ts";

const NO_FILL = { off: [], fill: "none" } as const;

/** Ground in every gate: rough, still, badly correlated, mostly filtered away. */
function groundOnly(seed: number): SweepSketch {
  const even = evenNumbers(seed);
  return {
    dbz: () => 20 + 30 * even(),
    unfilteredDbz: () => 55,
    velocityMPerS: () => 0.2,
    zdrDb: () => 6 * (even() - 0.5),
    rhohv: () => 0.3 + 0.4 * even(),
    phidpDeg: () => 360 * even(),
  };
}

/** A field of rain without edges that moves by 3 km a round: waves of 20 km and more, 10 to 45 dBZ. */
function smoothRain(seed: number, round: number, elevationDeg: number): PolarEcho {
  const even = evenNumbers(seed);
  const waves = Array.from({ length: 4 }, () => ({
    perKm: (2 * Math.PI) / (20 + 40 * even()),
    towards: 2 * Math.PI * even(),
    phase: 2 * Math.PI * even(),
  }));
  const noise = evenNumbers(seed * 1000 + round);
  return sketchSweep({
    elevationDeg,
    gateCount: 50,
    gateLengthM: 1000,
    ...rainMoments(seed + round),
    dbz: (ray, gate) => {
      const azimuth = ((ray + 0.5) * Math.PI) / 180;
      const eastKm = (gate + 0.5) * Math.sin(azimuth) - 3 * round;
      const northKm = (gate + 0.5) * Math.cos(azimuth);
      let dbz = 27;
      for (const { perKm, towards, phase } of waves) {
        dbz += 4 * Math.sin(perKm * (eastKm * Math.sin(towards) + northKm * Math.cos(towards)) + phase);
      }
      return dbz + 1.5 * (noise() - 0.5);
    },
  });
}

test.each([1, 2, 3, 4, 5, 6])("a smooth field of rain loses nothing (seed %d)", (seed) => {
  const learner = new StaticEchoLearner();
  for (let round = 0; round < 9; round++) learner.add(smoothRain(seed, round, 0.5));
  const learned = learner.finish();
  expect(learned.sweeps[0]?.static.places).toHaveLength(0);
  const echo = smoothRain(seed, 4, 0.5);
  const report = screenSweep(echo, smoothRain(seed, 4, 1.2), learned, DEFAULT_SCREENING);
  expect(report.couldNotRun.map(({ screen }) => screen)).toEqual(["filtered-power"]);
  expect(report.screenedGates).toBe(0);
  expect(echo.dbz).toEqual(echo.measuredDbz);
});

test("a sweep of nothing but ground is all taken, and nothing is left to fill it from", () => {
  const echo = sketchSweep(groundOnly(1));
  const report = screenSweep(echo, undefined, undefined, DEFAULT_SCREENING);
  expect(report.echoGates).toBe(21_600);
  expect(report.screenedGates).toBeGreaterThan(0.995 * 21_600);
  expect(report.gatesByFirstScreen.reduce((sum, gates) => sum + gates, 0)).toBe(report.screenedGates);
  const taken = echo.dbz.filter((dbz) => Number.isNaN(dbz)).length;
  expect(taken).toBe(report.screenedGates - report.filledGates);
});

test("dry gates and gates that were not observed are never screened, whatever their other moments say", () => {
  const even = evenNumbers(9);
  const echo = sketchSweep({ ...groundOnly(2), dbz: () => (even() < 0.5 ? DRY : Number.NaN) });
  const report = screenSweep(echo, sketchSweep({ elevationDeg: 1.5, dbz: () => DRY }), undefined, NO_FILL);
  expect([report.echoGates, report.screenedGates, report.sideLobeGates]).toEqual([0, 0, 0]);
  expect(echo.dbz).toEqual(echo.measuredDbz);
});

test("a radar with reflectivity alone says which screens could not run, and why", () => {
  const { couldNotRun } = screenSweep(
    sketchSweep({ dbz: () => 20 }),
    undefined,
    undefined,
    DEFAULT_SCREENING,
  );
  expect(couldNotRun).toEqual([
    { screen: "static-echo", lacking: "rounds to learn from" },
    { screen: "still-echo", lacking: "VRADH" },
    { screen: "filtered-power", lacking: "TH" },
    { screen: "low-correlation", lacking: "RHOHV" },
    { screen: "noisy-phase", lacking: "PHIDP" },
    { screen: "vertical-gradient", lacking: "a sweep above" },
    { screen: "fixed-point", lacking: "rounds to learn from" },
    { screen: "clear-air", lacking: "ZDR" },
  ] satisfies ScreeningReport["couldNotRun"]);
});

test("a screen that is switched off neither takes nor supports nor complains", () => {
  for (const screen of SCREENS) {
    const echo = sketchSweep({ ...groundOnly(3), gateCount: 30 });
    const report = screenSweep(echo, undefined, undefined, { off: [screen], fill: "none" });
    expect(echo.screenedBy.some((by) => (by & screenBit(screen)) !== 0)).toBe(false);
    expect(report.couldNotRun.some((one) => one.screen === screen)).toBe(false);
  }
  const echo = sketchSweep(groundOnly(3));
  const { screenedGates, couldNotRun } = screenSweep(echo, undefined, undefined, {
    off: SCREENS,
    fill: "none",
  });
  expect([screenedGates, couldNotRun]).toEqual([0, []]);
});

test("a field turned by any number of rays is screened the same, turned: north is no edge", () => {
  const even = evenNumbers(11);
  const gates = Array.from({ length: 360 * 40 }, () => (even() < 0.1 ? 20 + 30 * even() : DRY));
  const rhohv = gates.map(() => 0.6 + 0.4 * even());
  const turned = (by: number) => {
    const from = (ray: number, gate: number) => ((ray + by) % 360) * 40 + gate;
    const echo = sketchSweep({
      gateCount: 40,
      dbz: (ray, gate) => gates[from(ray, gate)] as number,
      rhohv: (ray, gate) => rhohv[from(ray, gate)] as number,
    });
    screenSweep(echo, undefined, undefined, DEFAULT_SCREENING);
    return echo;
  };
  const [straight, other] = [turned(0), turned(123)];
  const back = (values: Uint16Array | Float32Array) => [
    ...values.slice((360 - 123) * 40),
    ...values.slice(0, (360 - 123) * 40),
  ];
  expect(straight.screenedBy.some((by) => by !== 0)).toBe(true);
  expect(back(other.screenedBy)).toEqual([...straight.screenedBy]);
  expect(back(other.marks)).toEqual([...straight.marks]);
});

test.each([
  [1, 2],
  [1, 1],
  [2, 3],
  [0, 0],
])("a sweep of %d rays and %d gates is looked at without harm", (rayCount, gateCount) => {
  const tiny = () => sketchSweep({ ...groundOnly(4), rayCount, gateCount });
  const learner = new StaticEchoLearner();
  for (let round = 0; round < 9; round++) learner.add(tiny());
  const echo = tiny();
  const report = screenSweep(echo, tiny(), learner.finish(), DEFAULT_SCREENING);
  expect(report.echoGates).toBe(rayCount * gateCount);
  expect(report.filledGates).toBe(0);
});

describe("speckle", () => {
  const only = (gates: readonly (readonly [number, number])[], around: number = DRY) => {
    const echo = sketchSweep({
      dbz: (ray, gate) => (gates.some(([r, g]) => r === ray && g === gate) ? 20 : around),
    });
    screenSweep(echo, undefined, undefined, NO_FILL);
    return gates.map(([ray, gate]) => screensAt(echo, ray, gate));
  };
  const taken: Screen[] = ["speckle"];
  test("one gate and two are taken, a third keeps them", () => {
    expect(only([[50, 50]])).toEqual([taken]);
    expect(
      only([
        [50, 50],
        [50, 51],
      ]),
    ).toEqual([taken, taken]);
    expect(
      only([
        [50, 50],
        [50, 51],
        [51, 50],
      ]),
    ).toEqual([[], [], []]);
  });
  test("neighbours are counted across north", () => {
    expect(
      only([
        [359, 50],
        [0, 50],
        [0, 51],
      ]),
    ).toEqual([[], [], []]);
  });
  test("beside gates that were not observed nothing is said", () => {
    expect(only([[50, 50]], Number.NaN)).toEqual([[]]);
  });
});

describe("filling", () => {
  // One gate of bad correlation in rain of 20 and 30 dBZ to the two sides along the azimuth.
  const island = (oddDbz: number, settings: typeof DEFAULT_SCREENING = DEFAULT_SCREENING) => {
    const echo = sketchSweep({
      dbz: (ray, gate) => (ray === 90 && gate === 40 ? oddDbz : ray < 90 ? 20 : ray > 90 ? 30 : 25),
      rhohv: (ray, gate) => (ray === 90 && gate === 40 ? 0.4 : 0.98),
    });
    const report = screenSweep(echo, undefined, undefined, settings);
    const at = 90 * 60 + 40;
    return {
      report,
      dbz: echo.dbz[at] as number,
      isMarked: ((echo.marks[at] as number) & markBit("filled")) !== 0,
    };
  };
  test("the mean of Z around, not of dBZ, nearest gates first", () => {
    const { report, dbz, isMarked } = island(55);
    expect(report.filledGates).toBe(1);
    expect(isMarked).toBe(true);
    // Halves of 100 and 1000 mm6 m-3 give 27.4 dBZ; the gates along the ray, of 316, pull it down a little.
    expect(dbz).toBeGreaterThan(26.5);
    expect(dbz).toBeLessThan(27.4);
  });
  test("never above what was measured, as false echo only adds", () => {
    expect(island(12).dbz).toBe(12);
  });
  test("switched off, the gate is not observed and not marked", () => {
    const { report, dbz, isMarked } = island(55, NO_FILL);
    expect([report.filledGates, dbz, isMarked]).toEqual([0, Number.NaN, false]);
  });
  test("amid much false echo a gate is not observed, so that the next sweep may speak", () => {
    const isFalse = (ray: number, gate: number) =>
      ray >= 80 && ray < 110 && gate >= 20 && gate < 40 && (ray + gate) % 3 > 0;
    const echo = sketchSweep({ dbz: () => 25, rhohv: (ray, gate) => (isFalse(ray, gate) ? 0.4 : 0.98) });
    screenSweep(echo, undefined, undefined, DEFAULT_SCREENING);
    // Two gates of three are false in the middle; at the corner a quarter of the window is.
    expect(isFalse(95, 30)).toBe(true);
    expect(echo.dbz[95 * 60 + 30]).toBeNaN();
    expect(isFalse(80, 21)).toBe(true);
    expect(echo.dbz[80 * 60 + 21]).toBeCloseTo(25, 5);
  });
  test("amid dry gates it becomes dry", () => {
    const echo = sketchSweep({ dbz: (ray, gate) => (ray === 90 && gate === 40 ? 40 : DRY) });
    screenSweep(echo, undefined, undefined, DEFAULT_SCREENING);
    expect(echo.dbz[90 * 60 + 40]).toBe(DRY);
  });
});

test("weak echo at the range of an intense core is marked on both sides, and not taken", () => {
  const echo = sketchSweep({
    dbz: (ray, gate) => (ray >= 88 && ray <= 92 && gate >= 50 && gate <= 52 ? 60 : 10),
  });
  const report = screenSweep(echo, undefined, undefined, DEFAULT_SCREENING);
  const isMarked = (ray: number, gate: number) =>
    ((echo.marks[ray * 60 + gate] as number) & markBit("side-lobe")) !== 0;
  expect([isMarked(84, 51), isMarked(96, 51), isMarked(120, 51), isMarked(84, 60)]).toEqual([
    true,
    true,
    false,
    false,
  ]);
  expect(report.screenedGates).toBe(0);
  expect(report.sideLobeGates).toBe(echo.marks.filter((bits) => bits !== 0).length);
});

test("the first screen of a gate is the first of the list", () => {
  expect(firstScreenOf(screenBit("texture") | screenBit("low-correlation"))).toBe("low-correlation");
  expect(firstScreenOf(screenBit("speckle"))).toBe("speckle");
});
