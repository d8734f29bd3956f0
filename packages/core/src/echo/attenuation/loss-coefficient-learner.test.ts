import { describe, expect, test } from "vitest";
import { echoOf, noiseOf } from "../blockage/echo-fixture.ts";
import type { PolarEcho } from "../polar-echo.ts";
import {
  DEFAULT_LOSS_LEARNER_SETTINGS,
  LossCoefficientLearner,
  type LossEstimate,
} from "./loss-coefficient-learner.ts";
import { workUpPhase } from "./rain-phase.ts";
import { settleLossCoefficients } from "./settle-loss-coefficients.ts";

const C_BAND_M = 0.0535;
const S_BAND_M = 0.107;

interface Rain {
  readonly alphaDbPerDeg: number;
  readonly calibrationDb?: number;
  readonly seed: number;
}

/** Three showers along each ray, whose drops differ: KDP = c Z^0.76 with c off by a tenth from shower to shower. */
function showers({ alphaDbPerDeg, calibrationDb = 0, seed }: Rain): PolarEcho {
  const rayCount = 120;
  const gateCount = 60;
  const noise = noiseOf(seed);
  const dbz = new Float64Array(rayCount * gateCount);
  const phase = new Float64Array(rayCount * gateCount);
  for (let ray = 0; ray < rayCount; ray++) {
    let sum = 0;
    let drops = 1;
    let peak = 45;
    for (let gate = 0; gate < gateCount; gate++) {
      if (gate % 20 === 0) {
        drops = Math.exp(0.1 * noise());
        peak = 40 + 4 * noise();
      }
      const z = peak - 0.25 * (10 - (gate % 20)) ** 2;
      const step = 2 * 0.4 * drops * 10 ** (0.076 * (z - 38));
      dbz[ray * gateCount + gate] = z - alphaDbPerDeg * (sum + step / 2) + calibrationDb + 0.7 * noise();
      phase[ray * gateCount + gate] = 60 + sum + step / 2 + 2 * noise();
      sum += step;
    }
  }
  const echo = echoOf({
    elevationDeg: 0.5,
    rayCount,
    gateCount,
    wavelengthM: C_BAND_M,
    dbz: (ray, gate) => dbz[ray * gateCount + gate] as number,
    rhohv: () => 0.99,
    phidpDeg: (ray, gate) => phase[ray * gateCount + gate] as number,
  });
  workUpPhase(echo, { systemPhaseDeg: 60 });
  return echo;
}

function learned(rain: Omit<Rain, "seed">, seeds = [1, 2, 3, 4, 5, 6]): LossEstimate | undefined {
  const learner = new LossCoefficientLearner();
  for (const seed of seeds) learner.add(showers({ ...rain, seed }));
  return learner.finish();
}

describe("LossCoefficientLearner", () => {
  test.each([
    [0.12, 0],
    [0.06, 2],
    [0.06, -3],
    [0, 1],
  ])(
    "a loss of %d dB per degree comes out within two errors and 0.015, calibration %d dB off",
    (alphaDbPerDeg, calibrationDb) => {
      const estimate = learned({ alphaDbPerDeg, calibrationDb })!;
      expect(Math.abs(estimate.alphaDbPerDeg - alphaDbPerDeg)).toBeLessThan(
        2 * estimate.standardErrorDbPerDeg,
      );
      expect(Math.abs(estimate.alphaDbPerDeg - alphaDbPerDeg)).toBeLessThan(0.015);
      expect(estimate.standardErrorDbPerDeg).toBeLessThan(0.02);
    },
  );

  test("any order of sweeps gives the same to the last bit", () => {
    expect(learned({ alphaDbPerDeg: 0.08 }, [1, 2, 3, 4])).toEqual(
      learned({ alphaDbPerDeg: 0.08 }, [3, 1, 4, 2]),
    );
  });

  test("too little rain, or none behind rain, teaches nothing", () => {
    expect(new LossCoefficientLearner().finish()).toBeUndefined();
    const few = new LossCoefficientLearner({ ...DEFAULT_LOSS_LEARNER_SETTINGS, leastPairs: 100_000 });
    few.add(showers({ alphaDbPerDeg: 0.08, seed: 1 }));
    expect(few.finish()).toBeUndefined();
    const flat = new LossCoefficientLearner({ ...DEFAULT_LOSS_LEARNER_SETTINGS, leastPairs: 10 });
    const echo = echoOf({ elevationDeg: 0.5, dbz: () => 26, rhohv: () => 0.99, phidpDeg: () => 60 });
    workUpPhase(echo, { systemPhaseDeg: 60 });
    flat.add(echo);
    expect(flat.finish()).toBeUndefined();
  });

  test("nothing is taken from above the melting layer", () => {
    const low = new LossCoefficientLearner({ ...DEFAULT_LOSS_LEARNER_SETTINGS, rainBelowM: 90 });
    for (const seed of [1, 2, 3]) low.add(showers({ alphaDbPerDeg: 0.08, seed }));
    // The antenna stands at 100 m.
    expect(low.finish()).toBeUndefined();
  });
});

describe("settleLossCoefficients", () => {
  const estimate = (alphaDbPerDeg: number, standardErrorDbPerDeg: number): LossEstimate => ({
    alphaDbPerDeg,
    standardErrorDbPerDeg,
  });

  test("without evidence: the published value, less the chance of 0.15 + 0.05 * 0.158 that senders corrected", () => {
    const [settled] = settleLossCoefficients([{ wavelengthM: C_BAND_M, estimates: [] }]);
    // 0.15 / 0.95 = 0.1579 of the radars that go each for itself.
    expect(settled!.correctedBefore).toBeCloseTo(0.15 + 0.05 * 0.1579, 4);
    expect(settled!.alphaDbPerDeg).toBeCloseTo(0.08 * (1 - 0.15789), 4);
  });

  test("clear evidence of a loss stands between it and the published value, weighed by their variances", () => {
    const [settled] = settleLossCoefficients([{ wavelengthM: C_BAND_M, estimates: [estimate(0.12, 0.01)] }]);
    // Spread of C band: (0.13 - 0.05) / 3.29 = 0.02432; by hand (0.08 / 0.02432^2 + 0.12 / 0.01^2) / (1 / 0.02432^2 + 1 / 0.01^2).
    expect(settled!.alphaDbPerDeg).toBeCloseTo(0.11421, 4);
    expect(settled!.correctedBefore).toBeLessThan(1e-9);
  });

  test("clear evidence of none is none, for a radar that cannot tell by itself too", () => {
    const settled = settleLossCoefficients([
      { wavelengthM: S_BAND_M, estimates: [estimate(0.005, 0.03)] },
      { wavelengthM: C_BAND_M, estimates: [estimate(0.002, 0.008)] },
    ]);
    expect(settled[1]!.alphaDbPerDeg).toBe(0);
    expect(settled[0]!.alphaDbPerDeg).toBeLessThan(0.002);
  });

  test("two estimates of one radar count by their precision: 0.073 and 0.087 at equal errors are one of 0.08", () => {
    const both = settleLossCoefficients([
      { wavelengthM: C_BAND_M, estimates: [estimate(0.073, 0.01), estimate(0.087, 0.01)] },
    ]);
    const one = settleLossCoefficients([
      { wavelengthM: C_BAND_M, estimates: [estimate(0.08, 0.01 / Math.SQRT2)] },
    ]);
    expect(both[0]!.alphaDbPerDeg).toBeCloseTo(one[0]!.alphaDbPerDeg, 10);
  });

  test("estimates that contradict each other weigh less: 0.02 and 0.12, each 0.01, are 0.07 with an error of 0.05", () => {
    // Birge's ratio by hand: chi square 25 + 25 over one degree of freedom, variance 0.01^2 / 2 * 50 = 0.05^2.
    const settled = settleLossCoefficients([
      { wavelengthM: C_BAND_M, estimates: [estimate(0.02, 0.01), estimate(0.12, 0.01)] },
    ]);
    const one = settleLossCoefficients([{ wavelengthM: C_BAND_M, estimates: [estimate(0.07, 0.05)] }]);
    expect(settled[0]!.alphaDbPerDeg).toBeCloseTo(one[0]!.alphaDbPerDeg, 10);
  });

  test("a band without a published value is left to the caller", () => {
    expect(settleLossCoefficients([{ wavelengthM: 0.0086, estimates: [] }])).toEqual([undefined]);
  });
});
