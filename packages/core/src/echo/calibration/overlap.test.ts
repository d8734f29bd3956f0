import { describe, expect, test } from "vitest";
import { noiseOf } from "../blockage/echo-fixture.ts";
import { learnAttenuationFromOverlap, learnFactorFromOverlap } from "./overlap-attenuation.ts";
import { overlapDifference } from "./overlap-difference.ts";
import { type OverlapPairs, turned } from "./overlap-pairs.ts";

/** Two radars in the same rain: what is planted, and 3 dB of noise with one wild sample in twenty. */
function pairsOf(planted: {
  readonly count?: number;
  readonly instants?: number;
  /** Of the first radar against the second. */
  readonly offsetDb?: number;
  readonly dbPerDeg?: number;
  readonly phaseDeg?: number;
  /** Loss of the first radar's echo that no phase tells of, and what Hitschfeld-Bordan makes of it. */
  readonly lossDb?: (k: number) => number;
  readonly estimatedDb?: (k: number) => number;
}): OverlapPairs {
  const { count = 2000, instants = 12, offsetDb = 0, dbPerDeg = 0, phaseDeg = Number.NaN } = planted;
  const noise = noiseOf(3);
  const phase = Float32Array.from({ length: count }, (_, k) => (phaseDeg * ((k * 37) % 100)) / 100);
  const column = (of: (k: number) => number) => Float32Array.from({ length: count }, (_, k) => of(k));
  const trueDbz = column((k) => 25 + ((k * 17) % 20));
  const loss = (k: number) =>
    (Number.isNaN(phaseDeg) ? 0 : dbPerDeg * phase[k]!) + (planted.lossDb?.(k) ?? 0);
  return {
    oneSiteId: "one",
    otherSiteId: "other",
    count,
    seen: count,
    oneDbz: column((k) => trueDbz[k]! + offsetDb - loss(k) + 3 * noise() + (k % 20 === 0 ? 25 : 0)),
    otherDbz: trueDbz,
    oneAddedDb: column(() => 0),
    otherAddedDb: column(() => 0),
    oneLossDb: column((k) => planted.estimatedDb?.(k) ?? Number.NaN),
    otherLossDb: column(() => Number.NaN),
    onePhaseDeg: phase,
    otherPhaseDeg: column(() => 0),
    heightAslM: column(() => 500),
    weight: column(() => 1),
    epochMs: Float64Array.from({ length: count }, (_, k) => 300_000 * (k % instants)),
  };
}

const COEFFICIENTS = { oneDbPerDeg: 0.08, otherDbPerDeg: 0.02 };

describe("difference of two radars", () => {
  test("is what was planted, within its error, whichever radar is named first", () => {
    const pairs = pairsOf({ offsetDb: 1.5 });
    const found = overlapDifference(pairs)!;
    expect(Math.abs(found.valueDb - 1.5)).toBeLessThan(2 * found.standardErrorDb);
    expect(found.standardErrorDb).toBeLessThan(0.4);
    expect([found.oneSiteId, found.otherSiteId, found.sampleCount]).toEqual(["one", "other", 2000]);
    expect(overlapDifference(turned(pairs))!.valueDb).toBeCloseTo(-found.valueDb, 5);
  });

  test("is not what rain takes, where a customary coefficient would be half of it", () => {
    const pairs = pairsOf({ offsetDb: -1, dbPerDeg: 0.16, phaseDeg: 40 });
    for (const found of [
      overlapDifference(pairs, COEFFICIENTS)!,
      overlapDifference(turned(pairs), { oneDbPerDeg: 0.02, otherDbPerDeg: 0.08 })!,
    ]) {
      expect(Math.abs(Math.abs(found.valueDb) - 1)).toBeLessThan(0.5);
    }
  });

  test("is not a loss that was corrected though there was none", () => {
    const found = overlapDifference(pairsOf({ offsetDb: 2, dbPerDeg: 0, phaseDeg: 40 }), COEFFICIENTS)!;
    expect(Math.abs(found.valueDb - 2)).toBeLessThan(0.5);
  });

  test("is none for few samples, or samples of few instants", () => {
    expect(overlapDifference(pairsOf({ count: 99 }))).toBeUndefined();
    expect(overlapDifference(pairsOf({ instants: 3 }))).toBeUndefined();
  });
});

describe("loss per degree by a neighbour", () => {
  test("is what was planted, apart from a difference in calibration", () => {
    const found = learnAttenuationFromOverlap(pairsOf({ offsetDb: -2, dbPerDeg: 0.11, phaseDeg: 40 }), 0.02)!;
    expect(Math.abs(found.alphaDbPerDeg - 0.11)).toBeLessThan(3 * found.standardError);
    expect(found.standardError).toBeLessThan(0.02);
    expect(Math.abs(found.differenceDb - 2)).toBeLessThan(0.5);
  });

  test("does not depend on what had been corrected before", () => {
    const pairs = pairsOf({ dbPerDeg: 0.11, phaseDeg: 40 });
    const added = pairs.onePhaseDeg.map((phase) => 0.08 * phase);
    const corrected = { ...pairs, oneAddedDb: added, oneDbz: pairs.oneDbz.map((dbz, k) => dbz + added[k]!) };
    expect(learnAttenuationFromOverlap(corrected, 0)!.alphaDbPerDeg).toBeCloseTo(
      learnAttenuationFromOverlap(pairs, 0)!.alphaDbPerDeg,
      5,
    );
  });

  test("is none without phase, with little of it, and where none is lost", () => {
    expect(learnAttenuationFromOverlap(pairsOf({ dbPerDeg: 0.1 }), 0)).toBeUndefined();
    expect(learnAttenuationFromOverlap(pairsOf({ dbPerDeg: 0.1, phaseDeg: 5 }), 0)).toBeUndefined();
    expect(learnAttenuationFromOverlap(pairsOf({ phaseDeg: 40 }), 0)).toBeUndefined();
  });
});

describe("factor of Hitschfeld and Bordan's law by a neighbour", () => {
  const exponent = 0.8;
  /** By hand: the bracket of a factor f is 1 - f t where that of 1 is 1 - t. */
  const lossOf = (factor: number) => (k: number) =>
    (-10 / exponent) * Math.log10(1 - factor * 0.005 * (k % 100));

  test("is what was planted", () => {
    const pairs = pairsOf({ offsetDb: 1, lossDb: lossOf(1.6), estimatedDb: lossOf(1) });
    const found = learnFactorFromOverlap(pairs, exponent)!;
    expect(Math.abs(found.factor - 1.6)).toBeLessThan(3 * found.standardError);
    expect(found.standardError).toBeLessThan(0.3);
    const again = learnFactorFromOverlap(
      pairsOf({ lossDb: lossOf(1.6), estimatedDb: lossOf(1.3) }),
      exponent,
      1.3,
    )!;
    expect(Math.abs(again.factor - 1.6)).toBeLessThan(3 * again.standardError);
  });

  test("is none where nothing is lost, or no loss was estimated", () => {
    expect(learnFactorFromOverlap(pairsOf({ estimatedDb: () => 0.1 }), exponent)).toBeUndefined();
    expect(learnFactorFromOverlap(pairsOf({}), exponent)).toBeUndefined();
  });
});

test("results can be cloned", () => {
  const pairs = pairsOf({ offsetDb: 1, dbPerDeg: 0.1, phaseDeg: 30 });
  const results = [pairs, overlapDifference(pairs), learnAttenuationFromOverlap(pairs, 0)];
  expect(structuredClone(results)).toEqual(results);
});
