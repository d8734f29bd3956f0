import { describe, expect, test } from "vitest";
import { attenuationOfZOneWayDbPerKm } from "../../rain-attenuation.ts";
import { type EchoSketch, echoOf } from "../blockage/echo-fixture.ts";
import { markBit, type PolarEcho } from "../polar-echo.ts";
import { attenuationLawOfWavelength, DEFAULT_ATTENUATION_SETTINGS } from "./attenuation-settings.ts";
import { correctAttenuation } from "./correct-attenuation.ts";
import type { LearnedAttenuation } from "./learned.ts";

const C_BAND_M = 0.0535;
const GATE_KM = 0.5;
const GATES = 100;
const LOST = markBit("lost-in-attenuation");
const settings = DEFAULT_ATTENUATION_SETTINGS;

interface Path {
  readonly measuredDbz: number[];
  readonly lossDb: number[];
}

/** What a radar measures through true rain whose one-way attenuation is known: loss to each gate's centre. */
function pathThrough(trueDbz: (km: number) => number, oneWayDbPerKm: (dbz: number) => number): Path {
  const fine = 50;
  const measuredDbz: number[] = [];
  const lossDb: number[] = [];
  let loss = 0;
  for (let step = 0; step < GATES * fine; step++) {
    const km = ((step + 0.5) * GATE_KM) / fine;
    const own = (2 * oneWayDbPerKm(trueDbz(km)) * GATE_KM) / fine;
    if (step % fine === fine / 2) {
      lossDb.push(loss);
      measuredDbz.push(trueDbz(km) - loss);
    }
    loss += own;
  }
  return { measuredDbz, lossDb };
}

function oneRay(measuredDbz: readonly number[], more: Partial<EchoSketch> = {}): PolarEcho {
  return echoOf({
    elevationDeg: 0.5,
    rayCount: 1,
    gateCount: measuredDbz.length,
    gateLengthM: 1000 * GATE_KM,
    wavelengthM: C_BAND_M,
    dbz: (_, gate) => measuredDbz[gate] as number,
    ...more,
  });
}

const cell = (km: number) => 28 + 20 * Math.exp(-(((km - 15) / 5) ** 2));

describe("by phase", () => {
  test("linear: 60 degrees at C band are 4.8 dB, by hand from 0.08 dB per degree", () => {
    const echo = oneRay([30, 30, 30]);
    echo.rainPhaseDeg = Float32Array.of(0, 30, 60);
    const report = correctAttenuation(echo, {}, { ...settings, method: "linear" });
    expect(report).toMatchObject({
      method: "linear",
      alphaDbPerDeg: 0.08,
      alphaFrom: "published",
      mostLossDb: expect.closeTo(4.8, 5),
    });
    expect([...echo.dbz]).toEqual([30, expect.closeTo(32.4, 5), expect.closeTo(34.8, 5)]);
    expect([...echo.effectsDb.get("attenuation")!]).toEqual([...echo.twoWayLossDb!]);
  });

  test("ZPHI puts the loss where the rain is although the phase is known only roughly", () => {
    // A = 2e-4 Z^0.8 and 0.1 dB per degree; the phase in steps of 8 degrees, as if it were that rough.
    const path = pathThrough(cell, (dbz) => 2e-4 * 10 ** (0.08 * dbz));
    const rough = path.lossDb.map((loss) => 8 * Math.round(loss / 0.1 / 8));
    const error = (method: "linear" | "zphi") => {
      const echo = oneRay(path.measuredDbz);
      echo.rainPhaseDeg = Float32Array.from(rough);
      correctAttenuation(echo, { alphaDbPerDeg: 0.1 }, { ...settings, method, leastPathPhaseDeg: 50 });
      return Math.max(
        ...path.lossDb.map((loss, gate) => Math.abs((echo.twoWayLossDb![gate] as number) - loss)),
      );
    };
    expect(error("linear")).toBeGreaterThan(0.3);
    expect(error("zphi")).toBeLessThan(error("linear"));
  });

  test("ZPHI through gates that are not observed: half of the cell missing moves no gate by more than 0.4 dB", () => {
    const path = pathThrough(cell, (dbz) => 2e-4 * 10 ** (0.08 * dbz));
    const holes = path.measuredDbz.map((dbz, gate) =>
      gate > 22 && gate < 38 && gate % 2 === 0 ? Number.NaN : dbz,
    );
    const echo = oneRay(holes);
    echo.rainPhaseDeg = Float32Array.from(path.lossDb, (loss) => loss / 0.1);
    correctAttenuation(echo, { alphaDbPerDeg: 0.1 });
    for (const [gate, loss] of path.lossDb.entries()) {
      expect(Math.abs((echo.twoWayLossDb![gate] as number) - loss)).toBeLessThan(0.4);
    }
    expect(echo.dbz[24]).toBeNaN();
  });

  test("hail does not draw the loss to itself", () => {
    // Even rain of 40 dBZ, steady rise; five gates hold hail of 58 dBZ that adds no phase.
    const dbz = Array.from({ length: 60 }, (_, gate) => (gate >= 30 && gate < 35 ? 58 : 40));
    const phase = Float32Array.from(dbz, (_, gate) => gate);
    const echo = oneRay(dbz);
    echo.rainPhaseDeg = phase;
    correctAttenuation(echo, { alphaDbPerDeg: 0.05 });
    for (const [gate, deg] of phase.entries()) {
      expect(Math.abs((echo.twoWayLossDb![gate] as number) - 0.05 * deg)).toBeLessThan(0.06);
    }
  });

  test("a learned 0 changes nothing", () => {
    const echo = oneRay([30, 30]);
    echo.rainPhaseDeg = Float32Array.of(0, 50);
    expect(correctAttenuation(echo, { alphaDbPerDeg: 0 })).toMatchObject({
      method: "none",
      reason: "learned: this echo shows no loss by rain",
    });
    expect([...echo.dbz]).toEqual([30, 30]);
    expect(echo.effectsDb.size).toBe(0);
  });

  test("ZDR gets its own, smaller part back: 0.02 dB per degree at C band", () => {
    const echo = oneRay([30, 30], { zdrDb: () => -0.5 });
    const asRead = echo.zdrDb;
    echo.rainPhaseDeg = Float32Array.of(0, 50);
    expect(correctAttenuation(echo).zdrCorrected).toBe(true);
    expect(echo.zdrDb![1]).toBeCloseTo(0.5, 5);
    expect(asRead![1]).toBeCloseTo(-0.5, 5);
  });

  test("behind 20 dB nothing is known, wet or dry, and the gates say so", () => {
    const echo = oneRay([40, 40, 20, Number.NEGATIVE_INFINITY, Number.NaN]);
    echo.rainPhaseDeg = Float32Array.of(0, 240, 260, 260, 260);
    const report = correctAttenuation(echo);
    expect(report).toMatchObject({ echoGatesLost: 1, dryGatesLost: 1 });
    expect([...echo.dbz]).toEqual([40, expect.closeTo(59.2, 4), Number.NaN, Number.NaN, Number.NaN]);
    expect([...echo.marks]).toEqual([0, 0, LOST, LOST, LOST]);
  });
});

describe("by reflectivity", () => {
  const law = attenuationLawOfWavelength(C_BAND_M, settings.relation);
  const method = "hitschfeld-bordan" as const;

  test("Hitschfeld and Bordan give back what the law takes, within 0.05 dB of 3", () => {
    const path = pathThrough(cell, (dbz) => attenuationOfZOneWayDbPerKm(dbz, law));
    const echo = oneRay(path.measuredDbz);
    const report = correctAttenuation(echo);
    expect(report.method).toBe(method);
    expect(path.lossDb.at(-1)).toBeGreaterThan(1.5);
    for (const [gate, loss] of path.lossDb.entries()) {
      expect(Math.abs((echo.twoWayLossDb![gate] as number) - loss)).toBeLessThan(0.05);
    }
  });

  test("holes in the rain take what their neighbours take", () => {
    const path = pathThrough(cell, (dbz) => attenuationOfZOneWayDbPerKm(dbz, law));
    const echo = oneRay(path.measuredDbz.map((dbz, gate) => (gate % 3 === 1 ? Number.NaN : dbz)));
    correctAttenuation(echo);
    expect(Math.abs((echo.twoWayLossDb![99] as number) - (path.lossDb[99] as number))).toBeLessThan(0.1);
  });

  test("it stops at its limit: what lies behind is not observed, and where it cannot run away it does not", () => {
    const echo = oneRay(
      Array.from({ length: GATES }, (_, gate) => (gate < 60 ? 52 : Number.NEGATIVE_INFINITY)),
    );
    const report = correctAttenuation(echo);
    expect(report.echoGatesLost).toBeGreaterThan(5);
    expect(report.dryGatesLost).toBe(40);
    expect(report.mostLossDb).toBeLessThanOrEqual(settings.hitschfeldBordanLimitDb);
    const first = echo.marks.indexOf(LOST);
    expect(echo.twoWayLossDb![99]).toBeNaN();
    expect(echo.marks.subarray(first).every((marks) => marks === LOST)).toBe(true);
    expect(echo.dbz.subarray(first).every((dbz) => Number.isNaN(dbz))).toBe(true);
    expect(echo.dbz.subarray(0, first).every((dbz) => dbz >= 52 && dbz < 63)).toBe(true);
  });

  test("snow and melting snow above a known height take nothing", () => {
    const at = (bottomM: number) => {
      const echo = oneRay(new Array(GATES).fill(38));
      correctAttenuation(echo, {}, { ...settings, meltingLayer: { bottomM, topM: bottomM + 500 } });
      return echo.twoWayLossDb!;
    };
    // 0.5 degrees up from 100 m: 300 m is reached after some 18 km, gate 36.
    const low = at(300);
    const high = at(5000);
    expect(low[30]).toBe(high[30]);
    expect(low[99]).toBe(low[50]);
    expect(high[99]).toBeGreaterThan((low[99] as number) * 1.5);
  });

  test("the learned factor multiplies the law; 0 is for echo that was corrected before", () => {
    const lossAt = (hitschfeldBordanFactor: number) => {
      const echo = oneRay(new Array(20).fill(40));
      correctAttenuation(echo, { hitschfeldBordanFactor });
      return echo.twoWayLossDb?.[19] ?? 0;
    };
    expect(lossAt(0)).toBe(0);
    expect(lossAt(2) / lossAt(1)).toBeGreaterThan(2);
    expect(lossAt(2) / lossAt(1)).toBeLessThan(2.3);
  });

  test("a loss per degree that was learned goes for reflectivity too: twice the 0.08 of C band is twice the law", () => {
    const lossAt = (learned: LearnedAttenuation) => {
      const echo = oneRay(new Array(20).fill(40));
      const { method: used } = correctAttenuation(echo, learned);
      return [used, echo.twoWayLossDb?.[19]];
    };
    expect(lossAt({ alphaDbPerDeg: 0.16 })).toEqual(lossAt({ hitschfeldBordanFactor: 2 }));
    expect(lossAt({ alphaDbPerDeg: 0 })).toEqual(["none", undefined]);
  });

  test("a method by phase that has no phase says so", () => {
    const echo = oneRay([40, 40]);
    expect(correctAttenuation(echo, {}, { ...settings, method: "zphi" })).toMatchObject({
      method,
      reason: "zphi needs a PHIDP that was worked up, and a coefficient",
    });
  });

  test("neither wavelength nor coefficient", () => {
    const echo = echoOf({ elevationDeg: 0.5, dbz: () => 40 });
    expect(correctAttenuation(echo)).toMatchObject({
      method: "none",
      reason: "neither the wavelength nor a coefficient is known",
    });
  });
});

describe("dry gates behind a loss", () => {
  const behind = (lossDb: number, more: Partial<typeof settings>) => {
    const echo = oneRay([40, ...new Array(59).fill(Number.NEGATIVE_INFINITY)]);
    echo.rainPhaseDeg = new Float32Array(60).fill(100);
    echo.rainPhaseDeg[0] = 0;
    correctAttenuation(echo, { alphaDbPerDeg: lossDb / 100 }, { ...settings, ...more });
    return echo;
  };

  test("stay dry where 1 mm/h would still be seen", () => {
    expect(behind(9.9, {}).dbz[59]).toBe(Number.NEGATIVE_INFINITY);
    expect(behind(10.1, {}).dbz[59]).toBeNaN();
  });

  test("with the radar's sensitivity known, the far ones are lost first", () => {
    // -10 dBZ at 1 km is 19 dBZ at 28 km: a loss of 4 dB hides 23 dBZ from there on, by hand 23 - 4 + 10 = 29 dB.
    const { dbz } = behind(4, { detectableAt1KmDbz: -10 });
    const first = dbz.findIndex((value) => Number.isNaN(value));
    expect(((first + 0.5) * GATE_KM) / 10 ** (29 / 20)).toBeGreaterThan(1);
    expect(((first - 0.5) * GATE_KM) / 10 ** (29 / 20)).toBeLessThanOrEqual(1);
  });
});

test("loss by gas that is known already counts into the two-way loss, and is not added twice", () => {
  const echo = oneRay([30, 30]);
  echo.twoWayLossDb = Float32Array.of(0.1, 0.2);
  echo.rainPhaseDeg = Float32Array.of(0, 10);
  correctAttenuation(echo);
  expect(echo.twoWayLossDb[1]).toBeCloseTo(1, 5);
  expect(echo.dbz[1]).toBeCloseTo(30.8, 5);
});

test("switched off", () => {
  const echo = oneRay([30, 30]);
  expect(correctAttenuation(echo, {}, { ...settings, method: "none" })).toMatchObject({
    method: "none",
    reason: "switched off",
  });
});
