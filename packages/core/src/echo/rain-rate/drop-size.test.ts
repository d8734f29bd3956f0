import { describe, expect, test } from "vitest";
import { findRelation, rainRateMmPerHour } from "../../relations.ts";
import { markBit } from "../polar-echo.ts";
import { DropSizeLearner, dropSizeRatio, joinDropSizes, kdpFactorOf } from "./drop-size.ts";
import { gateRates } from "./gate-rates.ts";
import { type GateRateSettings, POLARIMETRIC_RATE_DEFAULTS, rateTables } from "./rate-tables.ts";
import { readyRelation } from "./ready-relation.ts";
import { type TestGate, testEcho } from "./test-echo.ts";

const S_BAND_M = 0.299792458 / 2.8;
const C_BAND_M = 0.053;
const RELATION = findRelation("marshall-1955-200/1.6");
const READY = readyRelation(RELATION, { dbz: 53 });
const SETTINGS: GateRateSettings = {
  relation: RELATION,
  cap: { dbz: 53 },
  minRateMmPerHour: 0,
  polarimetric: POLARIMETRIC_RATE_DEFAULTS,
};
/** In the middles of classes, and exact in float32. */
const RAIN: TestGate = { dbz: 38.25, zdrDb: 1.25, rhohv: 0.99 };
/**
 * By hand: 9.754e-3 · 10^(0.8485 · 3.825 − 0.255 · 1.25) = 8.240 mm/h over (10^3.825 / 200)^(1 / 1.6) = 8.964 mm/h.
 */
const RATIO = 0.9193;

/** Rounds of a sweep of 60 × 60 gates, five minutes apart. */
function learned(
  gateOf: (round: number, gate: number) => TestGate,
  over: { readonly wavelengthM?: number | undefined; readonly rounds?: number; readonly mark?: number } = {},
  order: (rounds: number[]) => number[] = (rounds) => rounds,
) {
  const { wavelengthM = S_BAND_M, rounds = 8, mark = 0 } = over;
  const learner = new DropSizeLearner();
  for (const round of order(Array.from({ length: rounds }, (_, k) => k))) {
    const echo = testEcho(60, 60, (_, gate) => gateOf(round, gate), wavelengthM);
    const at = round * 300_000;
    echo.marks.fill(mark);
    learner.add({ ...echo, header: { ...echo.header, startEpochMs: at, endEpochMs: at } });
  }
  return learner;
}

const ratioOf = (learner: DropSizeLearner, zdrOffsetDb = 0) => {
  const found = learner.finish(zdrOffsetDb);
  return found === undefined ? undefined : dropSizeRatio(found, READY);
};

describe("what the size of drops makes of R(Z)", () => {
  test.each([
    // 1 dB of ZDR is a factor of 10^-0.255 = 0.5559.
    [1.25, RATIO],
    [2.25, RATIO * 0.5559],
    [0.75, RATIO / 0.5559 ** 0.5],
  ])("with a ZDR of %d dB is as worked out by hand", (zdrDb, expected) => {
    const found = ratioOf(learned(() => ({ ...RAIN, zdrDb })))!;
    expect(Math.abs(found.ratio / expected - 1)).toBeLessThan(1e-3);
    expect(found.standardError).toBeCloseTo(0, 9);
    // Spread of 0.35, error of the law 0.15: 0.1225 / 0.145 of the logarithm.
    expect(found.factor).toBeCloseTo(found.ratio ** (0.1225 / 0.145), 9);
  });

  test("differs from time to time: the factor is drawn towards 1 by the error that this makes", () => {
    const found = ratioOf(learned((round) => ({ ...RAIN, zdrDb: round % 2 === 0 ? 0.75 : 2.25 })))!;
    expect(found.blockCount).toBe(8);
    // Eight values of R(Z, ZDR) over R(Z), 1.233 and 0.511 by turns, 0.361 about their mean of 0.872.
    expect(Math.abs(found.ratio / 0.872 - 1)).toBeLessThan(2e-3);
    expect(Math.abs(found.standardError / (Math.sqrt((8 * 0.361 ** 2) / 7 / 8) / 0.872) - 1)).toBeLessThan(
      0.03,
    );
    const share = 0.1225 / (0.145 + found.standardError ** 2);
    expect(found.factor).toBeCloseTo(found.ratio ** share, 9);
  });

  test("does not depend on the order of sweeps, and a relation of half the rain has twice the ratio", () => {
    const gates = (round: number, gate: number) => ({ ...RAIN, zdrDb: 0.8 + 0.1 * ((round + gate) % 5) });
    const forward = learned(gates).finish(0)!;
    expect(learned(gates, {}, (rounds) => rounds.reverse()).finish(0)).toEqual(forward);
    expect(structuredClone(forward)).toEqual(forward);
    const half = readyRelation({ ...RELATION, a: 200 * 2 ** 1.6 }, { dbz: 53 });
    expect(dropSizeRatio(forward, half)!.ratio / dropSizeRatio(forward, READY)!.ratio).toBeCloseTo(2, 9);
  });

  test("is freed of an offset of ZDR", () => {
    const high = ratioOf(
      learned(() => ({ ...RAIN, zdrDb: 1.75 })),
      0.5,
    )!;
    expect(Math.abs(high.ratio / RATIO - 1)).toBeLessThan(1e-3);
  });

  test.each<[string, TestGate, Parameters<typeof learned>[1]]>([
    ["at C band", RAIN, { wavelengthM: C_BAND_M }],
    ["without a wavelength", RAIN, { wavelengthM: Number.NaN }],
    ["without ZDR", { dbz: 38.25, rhohv: 0.99 }, {}],
    ["without RHOHV", { dbz: 38.25, zdrDb: 1.25 }, {}],
    ["in light rain", { ...RAIN, dbz: 27 }, {}],
    ["in rain that may be hail", { ...RAIN, dbz: 49 }, {}],
    ["in echo of low correlation", { ...RAIN, rhohv: 0.97 }, {}],
    ["where drops look round", { ...RAIN, zdrDb: 0.25 }, {}],
    ["in melting snow", RAIN, { mark: markBit("melting") }],
    ["in three rounds", RAIN, { rounds: 3 }],
  ])("%s cannot be told", (_, gate, over) => {
    expect(ratioOf(learned(() => gate, over))).toBeUndefined();
  });

  test("in a few gates cannot be told", () => {
    expect(ratioOf(learned((_, gate) => (gate === 3 ? RAIN : { ...RAIN, dbz: 10 })))).toBeUndefined();
  });

  test("beyond a factor of 4 it is a broken ZDR: nothing is changed", () => {
    const found = ratioOf(learned(() => ({ ...RAIN, zdrDb: 3.75 })))!;
    expect(found.ratio).toBeLessThan(0.25);
    expect(found.factor).toBe(1);
  });

  test("of two radars goes by their rain; one that tells nothing has no part", () => {
    const [one, other] = [1.25, 2.25].map((zdrDb) => learned(() => ({ ...RAIN, zdrDb })).finish(0));
    const both = dropSizeRatio(joinDropSizes([one, undefined, other])!, READY)!;
    expect(Math.abs(both.ratio / ((RATIO * (1 + 0.5559)) / 2) - 1)).toBeLessThan(1e-3);
    expect(joinDropSizes([undefined, undefined])).toBeUndefined();
  });
});

test("R(KDP) follows by the power that the number of drops has in it", () => {
  // 0.15 / (1 − 1 / 1.6) = 0.4, by hand; a linear law needs nothing; b of 1 cannot tell.
  expect(kdpFactorOf(0.8, 1.6, 0.85)).toBeCloseTo(0.8 ** 0.4, 9);
  expect(kdpFactorOf(0.8, 1.6, 1)).toBe(1);
  expect(kdpFactorOf(0.8, 1, 0.85)).toBe(1);
  expect(kdpFactorOf(0.8, 1.1, 0.85)).toBe(0.8);
});

describe("rates that follow the size of drops", () => {
  const dropSize = learned(() => ({ ...RAIN, zdrDb: 1.75 })).finish(0)!;
  const { factor } = dropSizeRatio(dropSize, READY)!;

  function rateOf(gate: TestGate, wavelengthM: number, settings = SETTINGS) {
    const tables = rateTables(settings, wavelengthM, { zdrOffsetDb: 0, dropSize });
    const rates = gateRates(
      testEcho(9, 9, () => gate, wavelengthM),
      undefined,
      settings,
      tables,
    );
    return { rate: rates.rateMmPerHour[40], rates };
  }

  test("are those of light rain at S band, and of C band; R(Z, ZDR) stays what it is", () => {
    expect(factor).toBeLessThan(0.75);
    const light = rateOf({ dbz: 25, zdrDb: 0.3, rhohv: 0.99 }, S_BAND_M);
    expect(light.rate / (factor * rainRateMmPerHour(25, RELATION))).toBeCloseTo(1, 6);
    expect(light.rates.dropSizeFactor).toBe(factor);
    expect(light.rates.dropNumberFactor).toBe(1);
    const moderate = rateOf({ dbz: 40, zdrDb: 1.9, rhohv: 0.99 }, C_BAND_M);
    expect(moderate.rate / (factor * rainRateMmPerHour(40, RELATION))).toBeCloseTo(1, 6);
    // 9.754e-3 · 10^(3.394 − 0.306) = 11.94 mm/h.
    expect(rateOf({ dbz: 40, zdrDb: 1.2, rhohv: 0.99 }, S_BAND_M).rate).toBeCloseTo(11.94, 1);
  });

  test("are those of KDP at C band by a lesser power", () => {
    const { rate } = rateOf({ dbz: 54, zdrDb: 2, rhohv: 0.99, kdpDegPerKm: 2 }, C_BAND_M);
    // 40.5 (2 · 2.8 / f)^0.85 with f = 5.6565 GHz.
    const law = 40.5 * ((2 * 2.8) / 5.65646) ** 0.85;
    expect(rate / (law * factor ** 0.4)).toBeCloseTo(1, 4);
  });

  test("are left alone where the plan says so, and at a wavelength without laws", () => {
    const off = { ...SETTINGS, polarimetric: { ...POLARIMETRIC_RATE_DEFAULTS, dropSize: false } };
    const plain = Math.fround(rainRateMmPerHour(25, RELATION));
    expect(rateOf({ dbz: 25 }, S_BAND_M, off).rate).toBe(plain);
    expect(rateOf({ dbz: 25 }, 0.022).rate).toBe(plain);
  });
});

test("where KDP tells more drops, and ZDR smaller ones, rain is raised once", () => {
  // R(Z) at 40 dBZ is 11.53 mm/h; KDP says 2.5 times as much, ZDR of moderate rain 1.3 times.
  const kdpDegPerKm = ((11.53 * 2.5) / 40.5) ** (1 / 0.85);
  const small = learned(() => ({ ...RAIN, zdrDb: 0.65 })).finish(0)!;
  const { factor } = dropSizeRatio(small, READY)!;
  expect(factor).toBeGreaterThan(1.2);
  const echo = testEcho(60, 60, () => ({ dbz: 40, zdrDb: 0.3, rhohv: 0.99, kdpDegPerKm }), S_BAND_M);
  const rates = gateRates(
    echo,
    undefined,
    SETTINGS,
    rateTables(SETTINGS, S_BAND_M, { zdrOffsetDb: 0, dropSize: small }),
  );
  expect(Math.abs((rates.dropSizeFactor * rates.dropNumberFactor) / 2.5 - 1)).toBeLessThan(0.02);
  expect(Math.abs(rates.rateMmPerHour[1800] / (2.5 * 11.53) - 1)).toBeLessThan(0.02);
});
