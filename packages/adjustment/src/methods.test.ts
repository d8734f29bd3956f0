import { describe, expect, test } from "vitest";
import { gaugeAt, HOUR, network, SETTINGS, scattered } from "./invented-gauges.ts";
import { type LearnedMethod, learnMethod, METHOD_NAMES, type MethodName } from "./methods.ts";
import type { WindowGauge } from "./window-gauges.ts";

const BIAS = "mean-field bias in its place";
const FIELDS = METHOD_NAMES.filter(
  (name) => !["none", "mean-field-bias", "log-mean-bias", "kalman-bias"].includes(name),
);

function depth(learned: LearnedMethod, x: number, y: number, radarMm: number): number {
  return learned.kind === "field"
    ? learned.depthMm(x, y, radarMm, Math.hypot(x, y))
    : radarMm * learned.factorAt(HOUR);
}

describe("what a method must give back", () => {
  const proportional = network(16, (radarMm) => 1.5 * radarMm);

  // By construction: where every gauge is 1.5 times the radar, so is every multiplicative answer.
  test.each([
    "mean-field-bias",
    "log-mean-bias",
    "kalman-bias",
    "range-dependent",
    "idw-multiplicative",
    "brandes",
    "kriging-multiplicative",
    "kriging-external-drift",
    "kriging-bayesian",
    "combined",
  ] as const)("%s: one factor everywhere is found everywhere", (name) => {
    const learned = learnMethod(name, proportional, SETTINGS);
    for (const [x, y, radarMm] of [
      [10, 10, 8],
      [55, 40, 12],
      [90, 95, 3],
    ]) {
      expect(depth(learned, x, y, radarMm)).toBeCloseTo(1.5 * radarMm, 6);
    }
  });

  // By construction: a constant of 2 mm added everywhere.
  test.each(["idw-additive", "kriging-additive", "conditional-merging", "kriging-external-drift"] as const)(
    "%s: one depth added everywhere is found everywhere",
    (name) => {
      const learned = learnMethod(
        name,
        network(16, (radarMm) => radarMm + 2),
        SETTINGS,
      );
      expect(depth(learned, 30, 70, 9)).toBeCloseTo(11, 6);
    },
  );

  test.each(["idw-additive", "idw-multiplicative", "idw-mixed"] as const)(
    "%s is exact at its gauges",
    (name) => {
      const gauges = network(12, (radarMm, x, y) => radarMm * (1 + x / 200) + y / 50);
      const learned = learnMethod(name, gauges, SETTINGS);
      for (const { xKm, yKm, gaugeMm, radarMm } of gauges)
        expect(depth(learned, xKm, yKm, radarMm)).toBeCloseTo(gaugeMm, 9);
    },
  );

  // By construction: the exponent of a relation that is off bends depths by a power; gauges between 6 and 19 mm show it.
  test("Bayesian kriging follows a power of the radar depth, and not beyond the gauges", () => {
    const bent = network(40, (radarMm) => 1.2 * radarMm ** 0.9);
    const learned = learnMethod("kriging-bayesian", bent, SETTINGS);
    for (const radarMm of [8, 12, 16]) {
      expect(Math.abs(depth(learned, 50, 50, radarMm) / (1.2 * radarMm ** 0.9) - 1)).toBeLessThan(0.03);
    }
    const most = Math.max(...bent.map((gauge) => gauge.radarMm));
    const ratio = (radarMm: number) => depth(learned, 50, 50, radarMm) / radarMm;
    expect(ratio(10 * most)).toBeCloseTo(ratio(most), 12);
  });

  // By construction: the factor doubles from west to east, smoothly.
  test("Bayesian kriging follows a factor that changes smoothly", () => {
    const factor = (x: number) => 1 + x / 100;
    const gauges = network(60, (radarMm, x) => radarMm * factor(x));
    const learned = learnMethod("kriging-bayesian", gauges, SETTINGS);
    for (const x of [20, 50, 80])
      expect(Math.abs(depth(learned, x, 50, 10) / (10 * factor(x)) - 1)).toBeLessThan(0.03);
  });

  test("the combination is the mean of its parts", () => {
    const gauges = network(15, (radarMm, x) => radarMm * (1 + x / 150));
    const of = (name: MethodName) => depth(learnMethod(name, gauges, SETTINGS), 33, 44, 9);
    expect(of("combined")).toBeCloseTo((of("brandes") + of("kriging-bayesian")) / 2, 12);
  });

  test("gauges alone do not look at the radar", () => {
    const learned = learnMethod("gauges-alone", proportional, SETTINGS);
    expect(depth(learned, 40, 40, 0)).toBe(depth(learned, 40, 40, 50));
  });
});

describe("what every method must hold", () => {
  const LAYOUTS = ["scattered", "one spot", "one line"] as const;
  /** Depths from 0 to 300 mm; about a third of them dry. */
  const depthOf = (index: number, stream: number) => Math.max(0, 450 * scattered(index, stream) - 150);

  // Wherever the gauges stand, on one spot or one line, wet or dry: a finite depth that is not negative.
  test.each(METHOD_NAMES)("%s: finite and never negative, NaN where the radar saw nothing", (name) => {
    let tried = 0;
    for (let round = 0; round < 90; round++) {
      const layout = LAYOUTS[round % 3];
      const gauges = Array.from({ length: 1 + (round % 14) }, (_, i) => {
        const seed = 100 * round + i;
        return gaugeAt(
          `g${i}`,
          [
            layout === "one spot" ? 5 : 120 * scattered(seed, 2),
            layout === "scattered" ? 120 * scattered(seed, 3) : 5,
          ],
          depthOf(seed, 4),
          depthOf(seed, 6),
        );
      });
      // Without radar rain at any gauge there is nothing to multiply, and the floors refuse beforehand.
      if (!gauges.some(({ radarMm }) => radarMm > 0)) continue;
      tried++;
      const learned = learnMethod(name, gauges, SETTINGS);
      const [x, y] = [120 * scattered(round, 7), 120 * scattered(round, 8)];
      for (const radarMm of [0, depthOf(round, 9)]) {
        const value = depth(learned, x, y, radarMm);
        expect(Number.isFinite(value)).toBe(true);
        expect(value).toBeGreaterThanOrEqual(0);
      }
      expect(depth(learned, x, y, Number.NaN)).toBeNaN();
    }
    expect(tried).toBeGreaterThan(60);
  });

  test.each(FIELDS)("%s: the order of the gauges does not matter", (name) => {
    const gauges = network(15, (radarMm, x) => radarMm * (0.8 + x / 100));
    const forward = learnMethod(name, gauges, SETTINGS);
    const backward = learnMethod(name, gauges.toReversed(), SETTINGS);
    expect(depth(backward, 33, 44, 9)).toBeCloseTo(depth(forward, 33, 44, 9), 8);
  });
});

describe("stated fallbacks", () => {
  const cases: [MethodName, string, WindowGauge[], string][] = [
    ["range-dependent", "too few ratios", network(6, (mm) => mm), `6 ratios by range, 8 needed: ${BIAS}`],
    [
      "range-dependent",
      "all at one range",
      network(10, (mm) => mm).map((gauge) => ({ ...gauge, rangeKm: 40 })),
      `all gauges at the same range: ${BIAS}`,
    ],
    ["kriging-external-drift", "too few places", network(7, (mm) => mm), `7 gauge places, 8 needed: ${BIAS}`],
    [
      "kriging-external-drift",
      "the same radar depth at every gauge (check value f-degenerate)",
      network(10, (mm) => mm).map((gauge) => ({ ...gauge, radarMm: 9, radarPointMm: 9 })),
      "the radar depth does not tell the gauges apart: ordinary kriging of the gauges in its place",
    ],
    [
      "kriging-additive",
      "few gauges and no radar variogram",
      network(6, (mm, x) => mm + x / 10),
      "no variogram to krige with: inverse distances in its place",
    ],
    [
      "gauges-alone",
      "no gauge with a whole window",
      network(6, (mm) => mm).map((gauge) => ({ ...gauge, complete: false })),
      `no gauge with a whole window: ${BIAS}`,
    ],
    ["kriging-bayesian", "too few ratios", network(4, (mm) => mm), `4 ratios, 5 needed: ${BIAS}`],
    ["combined", "too few ratios for one part", network(4, (mm) => mm), `4 ratios, 5 needed: ${BIAS}`],
    ["brandes", "no ratios", network(6, () => 0.1), `fewer than 2 ratios: ${BIAS}`],
    ["log-mean-bias", "no ratios", network(6, () => 0.1), `no gauge and radar both wet: ${BIAS}`],
  ];
  test.each(cases)("%s: %s", (name, _what, gauges, note) => {
    expect(learnMethod(name, gauges, SETTINGS).notes).toContain(note);
  });

  test("few gauges take the variogram of the radar field, without a word of a fallback", () => {
    const learned = learnMethod(
      "kriging-additive",
      network(6, (mm, x) => mm + x / 10),
      {
        ...SETTINGS,
        radarVariogram: { shape: "spherical", nugget: 0, partialSill: 1, rangeKm: 50 },
      },
    );
    expect(learned.notes).toEqual([]);
  });

  // Check value f-brandes-underflow: far from every gauge all weights vanish, and the mean-field bias stands.
  test("Brandes far from every gauge is the mean-field bias", () => {
    const gauges = network(10, (mm, x) => mm * (1 + x / 100));
    const bias = learnMethod("mean-field-bias", gauges, SETTINGS);
    expect(depth(learnMethod("brandes", gauges, SETTINGS), 1e5, 1e5, 7)).toBeCloseTo(depth(bias, 0, 0, 7), 9);
  });

  // Check value f-dup-averaged: twins become one gauge with their mean.
  test("two gauges in one place count as one with their mean", () => {
    const gauges = network(12, (mm, x) => mm + x / 20);
    const [first, ...rest] = gauges;
    const twins = [
      { ...first, gaugeMm: first.gaugeMm - 1 },
      { ...first, gaugeId: "twin", gaugeMm: first.gaugeMm + 1 },
    ];
    const settings = { ...SETTINGS, gaugeErrorShare: 0 };
    const one = learnMethod("idw-additive", gauges, settings);
    const two = learnMethod("idw-additive", [...twins, ...rest], settings);
    expect(depth(two, 20, 30, 9)).toBeCloseTo(depth(one, 20, 30, 9), 12);
  });
});

describe("a factor in time", () => {
  /** The gauges read twice the radar in the first two hours and as much in the last two. */
  const turning = network(12, (mm) => 1.5 * mm).map((gauge) => ({
    ...gauge,
    readings: gauge.readings.map((reading, hour) => ({
      ...reading,
      gaugeMm: reading.radarMm * (hour < 2 ? 2 : 1),
    })),
  }));
  const learned = learnMethod("kalman-bias", turning, SETTINGS);
  if (learned.kind !== "factor") throw new Error("the filter gives factors");

  test("follows the bias down", () => {
    expect(learned.factorAt(1.5 * HOUR)).toBeGreaterThan(1.7);
    expect(learned.factorAt(3.5 * HOUR)).toBeLessThan(1.2);
  });

  test("has no step at the hour, and is held beyond the first and last middle", () => {
    for (const hour of [1, 2, 3]) {
      const step = learned.factorAt(hour * HOUR + 1) - learned.factorAt(hour * HOUR - 1);
      expect(Math.abs(step)).toBeLessThan(1e-5);
    }
    expect(learned.factorAt(0)).toBe(learned.factorAt(0.5 * HOUR));
    expect(learned.factorAt(4 * HOUR)).toBe(learned.factorAt(3.5 * HOUR));
  });

  test("its logarithm is linear between the middles of hours", () => {
    const middle = Math.sqrt(learned.factorAt(1.5 * HOUR) * learned.factorAt(2.5 * HOUR));
    expect(learned.factorAt(2 * HOUR)).toBeCloseTo(middle, 12);
  });
});
