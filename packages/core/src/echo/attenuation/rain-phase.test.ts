import { describe, expect, test } from "vitest";
import { echoOf, noiseOf } from "../blockage/echo-fixture.ts";
import { screenBit } from "../polar-echo.ts";
import { MonotoneFit, medianOfFive } from "./monotone.ts";
import { DEFAULT_PHASE_SETTINGS } from "./phase-gates.ts";
import { workUpPhase } from "./rain-phase.ts";
import { SystemPhaseLearner } from "./system-phase.ts";

const GATE_M = 500;
const RAYS = 36;

/** Rain of 25 dBZ with PHIDP as given; 80 gates of 500 m. */
function rainWith(
  phidpDeg: (ray: number, gate: number) => number,
  more: { dbz?: number; kmFrom?: number } = {},
) {
  return echoOf({
    elevationDeg: 0.5,
    rayCount: RAYS,
    gateCount: 80,
    gateLengthM: GATE_M,
    dbz: () => more.dbz ?? 25,
    rhohv: () => 0.99,
    phidpDeg,
  });
}

/** Rise of PHIDP between 10 and 20 km by KDP of 2 deg/km: 2 * 2 * 10 = 40 degrees, at the gate's centre. */
function riseDeg(gate: number): number {
  const km = ((gate + 0.5) * GATE_M) / 1000;
  return 4 * Math.max(0, Math.min(10, km - 10));
}

describe("PHIDP of 355 degrees that folds within the rain", () => {
  const noise = noiseOf(5);
  const echo = rainWith((_, gate) => (355 + riseDeg(gate) + 2 * noise() + 720) % 360);
  const report = workUpPhase(echo);

  test("system phase and noise are those that were put in", () => {
    expect(report.workedUp).toBe(true);
    if (!report.workedUp) return;
    expect(report.systemPhaseDeg).toBeCloseTo(355, 0);
    expect(report.systemPhaseFrom).toBe("sweep");
    expect(report.noiseDeg).toBeGreaterThan(1.8);
    expect(report.noiseDeg).toBeLessThan(2.2);
  });

  test("rain's phase is 0 before the rain and 40 degrees behind it, by hand", () => {
    const phase = echo.rainPhaseDeg!;
    let errors = 0;
    for (let ray = 0; ray < RAYS; ray++) {
      for (let gate = 0; gate < 80; gate++)
        errors += ((phase[ray * 80 + gate] as number) - riseDeg(gate)) ** 2;
    }
    expect(Math.sqrt(errors / phase.length)).toBeLessThan(1.2);
    expect(report.workedUp && report.mostRainPhaseDeg).toBeGreaterThan(39);
  });

  test("it never falls with range", () => {
    const phase = echo.rainPhaseDeg!;
    for (let i = 1; i < phase.length; i++) {
      if (i % 80 !== 0) expect(phase[i]).toBeGreaterThanOrEqual(phase[i - 1] as number);
    }
  });

  test("KDP is 2 deg/km in the middle of the rise and 0 outside", () => {
    const meanAt = (gate: number) =>
      Array.from({ length: RAYS }, (_, ray) => echo.kdpDegPerKm![ray * 80 + gate] as number).reduce(
        (sum, kdp) => sum + kdp / RAYS,
        0,
      );
    expect(meanAt(30)).toBeCloseTo(2, 1);
    expect(meanAt(65)).toBeCloseTo(0, 1);
  });
});

test("heavy rain takes a window of 2 km: a rise of 2 km keeps its KDP, which 6 km would flatten", () => {
  const rise = (gate: number) => 12 * Math.max(0, Math.min(2, (gate + 0.5) * 0.5 - 10));
  const at21 = (dbz: number) => {
    const echo = rainWith((_, gate) => 40 + rise(gate), { dbz });
    workUpPhase(echo, { systemPhaseDeg: 40 });
    return echo.kdpDegPerKm![21] as number;
  };
  expect(at21(48)).toBeGreaterThan(5);
  expect(at21(25)).toBeLessThan(3.5);
});

test("a falling phase gives a negative KDP, and a rain phase that stays", () => {
  const echo = rainWith((_, gate) => 60 - 0.5 * gate);
  const report = workUpPhase(echo, { systemPhaseDeg: 60 });
  expect(report.workedUp && report.systemPhaseFrom).toBe("learned");
  // -0.5 degrees in 0.5 km: -1 deg/km both ways.
  expect(echo.kdpDegPerKm![40]).toBeCloseTo(-0.5, 5);
  expect(echo.rainPhaseDeg!.every((phase) => phase === 0)).toBe(true);
});

test("KDP that the file has stays as it is", () => {
  const echo = rainWith((_, gate) => 60 + riseDeg(gate));
  const kdp = new Float32Array(RAYS * 80).fill(0.7);
  echo.kdpDegPerKm = kdp;
  const report = workUpPhase(echo);
  expect(report.workedUp && report.kdpWorkedOut).toBe(false);
  expect(echo.kdpDegPerKm).toBe(kdp);
});

test("KDP of noise that hides it is not told: 3 gates of 15 degrees in 6 km", () => {
  const noise = noiseOf(8);
  const echo = echoOf({
    elevationDeg: 0.5,
    rayCount: RAYS,
    gateCount: 20,
    gateLengthM: 2000,
    dbz: () => 25,
    rhohv: () => 0.99,
    phidpDeg: () => 60 + 15 * noise(),
  });
  expect(workUpPhase(echo, { systemPhaseDeg: 60 }).workedUp).toBe(true);
  expect(echo.kdpDegPerKm!.every((kdp) => Number.isNaN(kdp))).toBe(true);
});

test("a bump by backscatter of 25 degrees over 1.5 km leaves at most 2 degrees behind it", () => {
  const noise = noiseOf(3);
  const bump = (gate: number) => (gate >= 30 && gate < 33 ? 25 : 0);
  const echo = rainWith((_, gate) => 60 + riseDeg(gate) * 0.2 + bump(gate) + 1.5 * noise());
  workUpPhase(echo, { systemPhaseDeg: 60 });
  for (let ray = 0; ray < RAYS; ray++) {
    expect(Math.abs((echo.rainPhaseDeg![ray * 80 + 50] as number) - 8)).toBeLessThan(2);
  }
});

test("screened gates with a wild phase are passed over and filled along the ray", () => {
  const echo = rainWith((_, gate) => (gate >= 20 && gate < 30 ? (gate * 97) % 360 : 60 + riseDeg(gate)));
  for (let i = 0; i < echo.dbz.length; i++) {
    if (i % 80 >= 20 && i % 80 < 30) echo.screenedBy[i] = screenBit("noisy-phase");
  }
  workUpPhase(echo, { systemPhaseDeg: 60 });
  // From 19 (at 9.75 km: 0 degrees) to 30 (15.25 km: 21 degrees) a straight line.
  expect(echo.rainPhaseDeg![19]).toBeCloseTo(0, 5);
  expect(echo.rainPhaseDeg![30]).toBeCloseTo(21, 5);
  expect(echo.rainPhaseDeg![25]).toBeCloseTo((21 * 6) / 11, 4);
});

test("one wild gate that was not screened does not fold the rest", () => {
  const echo = rainWith((_, gate) => (gate === 2 ? 230 : 60 + riseDeg(gate)));
  workUpPhase(echo, { systemPhaseDeg: 60 });
  expect(echo.rainPhaseDeg![70]).toBeCloseTo(40, 0);
});

test("phase that repeats after 180 degrees unfolds with that setting", () => {
  const echo = rainWith((_, gate) => (160 + riseDeg(gate)) % 180);
  const report = workUpPhase(echo, {}, { ...DEFAULT_PHASE_SETTINGS, foldDeg: 180 });
  expect(report.workedUp && report.systemPhaseDeg).toBeCloseTo(160, 0);
  expect(echo.rainPhaseDeg![79]).toBeCloseTo(40, 0);
});

describe("PHIDP that nothing can be made of leaves the echo as it is, with a reason", () => {
  const jump = noiseOf(11);
  test.each([
    [
      "noise all over the circle",
      () => 180 * (1 + Math.tanh(3 * jump())),
      /PHIDP is noise: \d+° from gate to gate/,
    ],
    ["all missing", () => Number.NaN, /no gate with echo has a PHIDP/],
    [
      "a ramp that never ends, other on each ray",
      (ray: number, gate: number) => (37 * ray + 9 * gate) % 360,
      /no system phase: 36 rays begin with light rain, and no half of them agree/,
    ],
  ] as const)("%s", (_name, phidpDeg, reason) => {
    const echo = rainWith(phidpDeg);
    const report = workUpPhase(echo);
    expect(report.workedUp ? "" : report.reason).toMatch(reason);
    expect(echo.rainPhaseDeg).toBeUndefined();
    expect(echo.kdpDegPerKm).toBeUndefined();
  });

  test("no PHIDP in the file", () => {
    const echo = echoOf({ elevationDeg: 0.5, dbz: () => 30 });
    expect(workUpPhase(echo)).toEqual({ workedUp: false, reason: "the sweep has no PHIDP" });
  });

  test("single gates of echo", () => {
    const echo = rainWith((_, gate) => (gate % 2 === 0 ? 60 : Number.NaN));
    expect(workUpPhase(echo)).toMatchObject({ reason: expect.stringContaining("no three gates in a row") });
  });
});

describe("SystemPhaseLearner", () => {
  const sweep = (seed: number) => {
    const noise = noiseOf(seed);
    // Four rays of ten begin in clutter that nobody screened: their phase is anything.
    return rainWith(
      (ray, gate) => (ray % 10 < 4 && gate < 6 ? (ray * 71 + gate * 113) % 360 : 2 + 3 * noise() + 360) % 360,
    );
  };

  test("clutter at the near edge of four rays in ten is outvoted, also at the fold", () => {
    const learner = new SystemPhaseLearner();
    for (let k = 0; k < 10; k++) learner.add(sweep(k));
    const learned = learner.finish()!;
    expect(Math.abs(learned.systemPhaseDeg - 2)).toBeLessThan(0.5);
    expect(learned.rays).toBe(360);
  });

  test("any order of sweeps gives the same", () => {
    const finished = (seeds: readonly number[]) => {
      const learner = new SystemPhaseLearner();
      for (const seed of seeds) learner.add(sweep(seed));
      return learner.finish();
    };
    expect(finished([1, 2, 3, 4])).toEqual(finished([4, 2, 1, 3]));
  });

  test("nothing without rain, or without PHIDP", () => {
    const learner = new SystemPhaseLearner();
    learner.add(
      echoOf({ elevationDeg: 0.5, dbz: () => Number.NEGATIVE_INFINITY, phidpDeg: () => Number.NaN }),
    );
    learner.add(echoOf({ elevationDeg: 0.5, dbz: () => 30 }));
    expect(learner.finish()).toBeUndefined();
  });
});

test.each([
  // Ayer et al. (1955): neighbours that fall are pooled into their mean. By hand.
  [
    [1, 3, 2, 4],
    [1, 2.5, 2.5, 4],
  ],
  [
    [5, 4, 3],
    [4, 4, 4],
  ],
  [
    [1, 2, 3],
    [1, 2, 3],
  ],
  [
    [3, 1, 5, 1, 6],
    [2, 2, 3, 3, 6],
  ],
])("the rise nearest to %j is %j", (values, expected) => {
  const series = Float64Array.from(values);
  new MonotoneFit(8).fit(series, values.length);
  expect([...series]).toEqual(expected);
});

test("median of five against sorting", () => {
  const noise = noiseOf(21);
  const values = Float64Array.from({ length: 200 }, () => Math.round(2 * noise()));
  const out = new Float64Array(200);
  medianOfFive(values, 200, out);
  for (let i = 2; i < 198; i++) expect(out[i]).toBe(values.slice(i - 2, i + 3).sort()[2]);
});
