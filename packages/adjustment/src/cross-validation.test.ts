import type { Pair } from "@rainreckon/core";
import { scorePairs } from "@rainreckon/verification";
import { describe, expect, test } from "vitest";
import { chooseMethod, validateChoice, validateMethod } from "./choose-method.ts";
import { crossValidatedPairs } from "./cross-validation.ts";
import { clustersOf, foldsOf } from "./folds.ts";
import { gaugeAt, HOUR, network, SETTINGS } from "./invented-gauges.ts";
import { learnMethod } from "./methods.ts";
import { type WindowGauge, windowGauges } from "./window-gauges.ts";

function pair(gaugeId: string, gaugeMm: number, radarMm: number, changes: Partial<Pair> = {}): Pair {
  return {
    network: "moor",
    gaugeId,
    startEpochMs: 0,
    endEpochMs: HOUR,
    gaugeMm,
    radarMm,
    radarId: "sabird",
    gaugeObservedFraction: 1,
    radarObservedFraction: 1,
    commonFraction: 1,
    rangeKm: 42,
    beamHeightAslM: 900,
    used: true,
    reason: "",
    ...changes,
  };
}

const places = new Map(
  ["a", "b", "c", "x"].map((id, i) => [
    `moor\u001f${id}`,
    { xM: 1000 * i, yM: 0, radarTotalMm: 1, radarPointTotalMm: 1 },
  ]),
);

describe("gauges held out of a mean-field bias", () => {
  // By hand: gauges 2, 4, 12 against radar 1, 4, 4. Factors of the others: 16/8, 14/5, 6/5.
  const three = [pair("a", 2, 1), pair("b", 4, 4), pair("c", 12, 4)];
  const held = validateMethod("mean-field-bias", windowGauges(three, places), SETTINGS).validation;

  test("each is judged by the factor of the others alone", () => {
    expect(held.gauges.map(({ crossValidatedMm }) => crossValidatedMm)).toEqual([2, 11.2, 1.2 * 4]);
    const errors = [2 - 2, 11.2 - 4, 4.8 - 12];
    const errorMm = Math.sqrt(errors.reduce((sum, error) => sum + error ** 2, 0) / 3);
    expect(held.errorMm).toBeCloseTo(errorMm, 12);
    expect(held.meanErrorMm).toBeCloseTo(0, 12);
    expect(held.errorPercent).toBeCloseTo((100 * errorMm) / 6, 12);
    expect(held.errorBeforeMm).toBeCloseTo(Math.sqrt((1 + 0 + 64) / 3), 12);
  });

  test("gives pairs to score, with the gauge depths as they were and unused ones untouched", () => {
    const unused = pair("x", 1, 1, { used: false, reason: "no gauge data" });
    const pairs = crossValidatedPairs([...three, unused], held);
    expect(pairs.map((each) => each.gaugeMm)).toEqual([2, 4, 12, 1]);
    pairs.forEach((each, i) => {
      expect(each.radarMm).toBeCloseTo([2, 11.2, 4.8, 1][i], 12);
    });
    expect(pairs[3]).toBe(unused);
    const scores = scorePairs(pairs, {
      thresholdMm: 0.2,
      thresholdsMm: [1],
      rangeBandsKm: [50],
      pairIntervalMs: HOUR,
      bootstrap: { seed: 1, samples: 100, level: 0.9, blockMinutes: 60 },
    });
    const ratio = scores.whole.continuous.find((score) => score.name === "biasRatio");
    expect(ratio?.value).toBeCloseTo(18 / 18, 12);
  });

  test("factors of the others meet the limits", () => {
    const faint = windowGauges(
      three.map((each) => ({ ...each, radarMm: each.radarMm / 100 })),
      places,
    );
    const { gauges } = validateMethod("mean-field-bias", faint, SETTINGS).validation;
    gauges.forEach(({ gauge, crossValidatedMm }) => {
      expect(crossValidatedMm).toBeCloseTo(10 * gauge.radarMm, 12);
    });
  });

  test("where the others saw no radar rain there is no figure, with the reason", () => {
    const pairs = [pair("a", 3, 2), pair("b", 1, 0), pair("c", 0, 0)];
    const lone = validateMethod("mean-field-bias", windowGauges(pairs, places), SETTINGS).validation;
    expect(lone.gauges[0].crossValidatedMm).toBeNaN();
    expect([lone.gaugeCount, lone.withoutFigure]).toEqual([2, 1]);
    expect(crossValidatedPairs(pairs, lone)[0]).toMatchObject({
      used: false,
      reason: "the radar saw no rain at the other gauges: no factor",
    });
  });

  test("no gauge at all gives NaN", () => {
    const none = validateMethod("mean-field-bias", [], SETTINGS).validation;
    expect([none.errorMm, none.errorPercent, none.gaugeCount]).toEqual([Number.NaN, Number.NaN, 0]);
  });
});

describe("a gauge that half the window is missing from", () => {
  // By hand: the field says 12 mm where the radar saw 8 mm in all; the pairs cover 2 mm of those.
  test("is judged on the time of its pairs", () => {
    const gauges = network(10, (mm) => 1.5 * mm);
    const part = gaugeAt("part", [50, 50], 3, 2, {
      radarTotalMm: 8,
      radarPointTotalMm: 8,
      coverage: 0.5,
      complete: false,
    });
    const all = [...gauges, part];
    const heldOut = validateMethod("idw-multiplicative", all, SETTINGS).validation.gauges;
    expect(heldOut[10].crossValidatedMm).toBeCloseTo(3, 9);
  });
});

describe("the choice of a method", () => {
  test("never lets a gauge judge what it shaped: its own reading cannot move its own figure", () => {
    const gauges = network(12, (mm, x) => mm * (1 + x / 80));
    const changed = gauges.with(4, { ...gauges[4], gaugeMm: 4 * gauges[4].gaugeMm });
    const before = validateChoice(gauges, SETTINGS).validation.gauges;
    const after = validateChoice(changed, SETTINGS).validation.gauges;
    expect(after[4].crossValidatedMm).toBe(before[4].crossValidatedMm);
    expect(after[5].crossValidatedMm).not.toBe(before[5].crossValidatedMm);
  });

  test("one factor everywhere: the mean-field bias, for nothing more complicated does better", () => {
    expect(
      chooseMethod(
        network(14, (mm) => 1.4 * mm),
        SETTINGS,
      ).chosen,
    ).toBe("mean-field-bias");
  });

  test("radar and gauges alike: no adjustment", () => {
    expect(
      chooseMethod(
        network(14, (mm) => mm),
        SETTINGS,
      ).chosen,
    ).toBe("none");
  });

  test("a factor that grows with range: the polynomial in range", () => {
    const gauges = network(24, (mm, x, y) => mm * 10 ** (0.1 + 0.004 * Math.hypot(x, y)));
    expect(chooseMethod(gauges, SETTINGS).chosen).toBe("range-dependent");
  });

  // Where the radar is noise, a factor is noise too; what can put the radar aside is the gauges alone, and a slope of
  // -1 on the log of the radar depth.
  test("a radar that sees nothing of the pattern: one that does without it", () => {
    const gauges = network(30, (_mm, x, y) => 12 + 8 * Math.sin(x / 60) * Math.cos(y / 60)).map(
      (gauge, i) => {
        const radarMm = 2 + 20 * (((i + 1) * 0.7548776662) % 1);
        return {
          ...gauge,
          radarMm,
          radarTotalMm: radarMm,
          radarPointMm: radarMm,
          radarPointTotalMm: radarMm,
        };
      },
    );
    const { chosen, candidates } = chooseMethod(gauges, SETTINGS);
    const errorOf = (name: string) => candidates.find((one) => one.name === name)?.errorMm as number;
    expect(errorOf("gauges-alone")).toBeLessThan(0.5 * errorOf("mean-field-bias"));
    expect(["gauges-alone", "kriging-bayesian"]).toContain(chosen);
  });

  test("the error to publish is that of what each gauge's own fold picked, without the gauge", () => {
    const gauges = network(12, (mm, x, y) => mm * (1 + 0.3 * Math.sin(x * y)));
    const { validation, chosenInFolds } = validateChoice(gauges, SETTINGS);
    for (const [i, { gauge, crossValidatedMm }] of validation.gauges.entries()) {
      const others = gauges.filter((_, other) => other !== i);
      const { chosen } = chooseMethod(others, SETTINGS);
      const alone = learnMethod(chosen, others, SETTINGS);
      const { xKm, yKm, radarMm, rangeKm } = gauge;
      const expected =
        alone.kind === "field" ? alone.depthMm(xKm, yKm, radarMm, rangeKm) : radarMm * alone.factorAt(0);
      expect(crossValidatedMm).toBeCloseTo(expected, 9);
    }
    expect([...chosenInFolds.values()].reduce((sum, times) => sum + times, 0)).toBe(12);
  });

  test("above the limit gauges are held out in ten groups, each in one", () => {
    expect([...foldsOf(3, 60)]).toEqual([0, 1, 2]);
    const folds = foldsOf(61, 60);
    expect(new Set(folds).size).toBe(10);
    expect(folds).toHaveLength(61);
  });
});

describe("clusters", () => {
  // By hand: four bunches of four gauges at the corners of a square, and the rule's count for sixteen is four.
  const corners = [
    [0, 0],
    [100, 0],
    [0, 100],
    [100, 100],
  ] as const;
  const bunches = corners.flatMap(([x, y], corner) =>
    [0, 1, 2, 3].map((k) => gaugeAt(`${corner}-${k}`, [x + k, y + (k % 2)], 5, 5)),
  );

  test("keep together what stands together", () => {
    const clusters = [...clustersOf(bunches)];
    expect(new Set(clusters).size).toBe(4);
    for (let corner = 0; corner < 4; corner++)
      expect(new Set(clusters.slice(4 * corner, 4 * corner + 4)).size).toBe(1);
  });

  test("are three to ten, and none is empty", () => {
    expect(new Set(clustersOf(network(6, (mm) => mm))).size).toBe(3);
    expect(new Set(clustersOf(network(90, (mm) => mm))).size).toBe(10);
    expect([...clustersOf([])]).toEqual([]);
    expect([...clustersOf(bunches.slice(0, 1))]).toEqual([0]);
  });

  test("a gauge is not met by its neighbours of the same cluster", () => {
    // Every corner has a factor of its own: from within the cluster it is met, from outside it is not.
    const gauges = bunches.map((gauge, i) => ({ ...gauge, gaugeMm: 5 * (1 + (i >> 2)) }));
    const { validation, clusterValidation } = validateMethod("idw-multiplicative", gauges, SETTINGS);
    expect(validation.errorMm).toBeLessThan(0.2);
    expect(clusterValidation.errorMm).toBeGreaterThan(4);
  });
});

describe("verdicts on gauges inside of holding out", () => {
  // Gauge g0 bears false witness: as long as it is there, g1 is not trusted.
  const gauges = network(12, (mm) => 1.3 * mm);
  const seen: string[][] = [];
  const trust = (some: readonly WindowGauge[]) => {
    seen.push(some.map(({ gaugeId }) => gaugeId));
    return some.filter(({ gaugeId }) => gaugeId !== "g1" || !some.some((one) => one.gaugeId === "g0"));
  };

  test("are made anew without the gauge that is held out", () => {
    const { validation } = validateMethod("mean-field-bias", gauges, SETTINGS, trust);
    expect(validation.gauges.map(({ gauge }) => gauge.gaugeId)).not.toContain("g1");
    expect(validation.gauges).toHaveLength(11);
    // Where g0 is held out, g1 is trusted and learned from: nothing but the sum over the others can be the factor.
    const sum = (of: "gaugeMm" | "radarMm") =>
      gauges.reduce((total, gauge) => total + (gauge.gaugeId === "g0" ? 0 : gauge[of]), 0);
    const first = validation.gauges[0];
    expect(first.gauge.gaugeId).toBe("g0");
    expect(first.crossValidatedMm).toBeCloseTo((first.gauge.radarMm * sum("gaugeMm")) / sum("radarMm"), 12);
  });

  test("around a choice too: nothing that a fold learns has seen its gauge, nor has a verdict in it", () => {
    const few = gauges.slice(0, 6);
    seen.length = 0;
    validateChoice(few, SETTINGS, trust);
    // All six, each five of them, each four: verdicts are asked for no set twice.
    const sets = seen.map((ids) => ids.join());
    expect(new Set(sets).size).toBe(sets.length);
    expect(sets).toContain("g0,g1,g3,g5");
  });

  test("what nobody trusts is no ground for anything", () => {
    const none = validateChoice(gauges, SETTINGS, () => []);
    expect(none.validation.gaugeCount).toBe(0);
    expect(none.chosen).toBe("mean-field-bias");
  });
});
