import type { Pair } from "@rainreckon/core";
import { scorePairs } from "@rainreckon/verification";
import { describe, expect, test } from "vitest";
import { chooseMethod, validateChoice, validateMethod } from "./choose-method.ts";
import { crossValidate, crossValidatedPairs, foldsOf } from "./cross-validation.ts";
import { gaugeAt, HOUR, network, SETTINGS } from "./invented-gauges.ts";
import { learnMethod } from "./methods.ts";
import { windowGauges } from "./window-gauges.ts";

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
  ["a", "b", "c", "x"].map((id, i) => [`moor\u001f${id}`, { xM: 1000 * i, yM: 0, radarTotalMm: 1 }]),
);

describe("gauges held out of a mean-field bias", () => {
  // By hand: gauges 2, 4, 12 against radar 1, 4, 4. Factors of the others: 16/8, 14/5, 6/5.
  const three = [pair("a", 2, 1), pair("b", 4, 4), pair("c", 12, 4)];
  const held = validateMethod("mean-field-bias", windowGauges(three, places), SETTINGS);

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
    const { gauges } = validateMethod("mean-field-bias", faint, SETTINGS);
    gauges.forEach(({ gauge, crossValidatedMm }) => {
      expect(crossValidatedMm).toBeCloseTo(10 * gauge.radarMm, 12);
    });
  });

  test("where the others saw no radar rain there is no figure, with the reason", () => {
    const pairs = [pair("a", 3, 2), pair("b", 1, 0), pair("c", 0, 0)];
    const lone = validateMethod("mean-field-bias", windowGauges(pairs, places), SETTINGS);
    expect(lone.gauges[0].crossValidatedMm).toBeNaN();
    expect([lone.gaugeCount, lone.withoutFigure]).toEqual([2, 1]);
    expect(crossValidatedPairs(pairs, lone)[0]).toMatchObject({
      used: false,
      reason: "the radar saw no rain at the other gauges: no factor",
    });
  });

  test("no gauge at all gives NaN", () => {
    const none = validateMethod("mean-field-bias", [], SETTINGS);
    expect([none.errorMm, none.errorPercent, none.gaugeCount]).toEqual([Number.NaN, Number.NaN, 0]);
  });
});

describe("a gauge that half the window is missing from", () => {
  // By hand: the field says 12 mm where the radar saw 8 mm in all; the pairs cover 2 mm of those.
  test("is judged on the time of its pairs", () => {
    const gauges = network(10, (mm) => 1.5 * mm);
    const part = gaugeAt("part", [50, 50], 3, 2, { radarTotalMm: 8, coverage: 0.5, complete: false });
    const all = [...gauges, part];
    const { gauges: heldOut } = crossValidate(all, foldsOf(all.length, 60), (others) =>
      learnMethod("idw-multiplicative", others, SETTINGS),
    );
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

  test("a radar that sees nothing of the pattern: the gauges alone", () => {
    const gauges = network(40, (_mm, x, y) => 12 + 8 * Math.sin(x / 30) * Math.cos(y / 30)).map(
      (gauge, i) => {
        const radarMm = 2 + 20 * (((i + 1) * 0.7548776662) % 1);
        return { ...gauge, radarMm, radarTotalMm: radarMm };
      },
    );
    expect(chooseMethod(gauges, SETTINGS).chosen).toBe("gauges-alone");
  });

  test("the winner's own error is not the one to publish: the outer one is of the whole procedure", () => {
    const gauges = network(12, (mm, x, y) => mm * (1 + 0.3 * Math.sin(x * y)));
    const { candidates, chosen } = chooseMethod(gauges, SETTINGS);
    const { validation, chosenInFolds } = validateChoice(gauges, SETTINGS);
    const own = candidates.find(({ name }) => name === chosen)?.errorMm as number;
    expect(validation.errorMm).toBeGreaterThanOrEqual(own);
    expect([...chosenInFolds.values()].reduce((sum, times) => sum + times, 0)).toBe(12);
  });

  test("above the limit gauges are held out in ten groups, each in one", () => {
    expect([...foldsOf(3, 60)]).toEqual([0, 1, 2]);
    const folds = foldsOf(61, 60);
    expect(new Set(folds).size).toBe(10);
    expect(folds).toHaveLength(61);
  });
});
