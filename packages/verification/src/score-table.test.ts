import type { Pair } from "@rainreckon/core";
import { checkValue } from "@rainreckon/test-data/published";
import { describe, expect, test } from "vitest";
import { type ScoreOptions, scorePairs } from "./score-table.ts";
import { scoresDocument, scoresSchema } from "./scores-document.ts";

const HOUR = 3_600_000;
const START = Date.UTC(2031, 4, 3, 12);

// The invented table of 24 hourly pairs of the check values, as one gauge a pair's range band.
const table = checkValue("a-pairs24-table").expected as {
  gauge_mm: number[];
  radar_mm: number[];
  range_km: number[];
};

function pair(hour: number, gaugeMm: number, radarMm: number, changes: Partial<Pair> = {}): Pair {
  return {
    network: "moor",
    gaugeId: "007",
    startEpochMs: START + hour * HOUR,
    endEpochMs: START + (hour + 1) * HOUR,
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

const pairs24 = table.gauge_mm.map((gaugeMm, hour) =>
  pair(hour, gaugeMm, table.radar_mm[hour], { rangeKm: table.range_km[hour] }),
);

const options: ScoreOptions = {
  thresholdMm: 0.2,
  thresholdsMm: [0.2, 1],
  rangeBandsKm: [50, 100, 150],
  pairIntervalMs: HOUR,
  bootstrap: { seed: 1, samples: 300, level: 0.9, blockMinutes: 60 },
};

function scoreOf<S extends { readonly name: string }>(scores: readonly S[], name: string): S {
  const found = scores.find((score) => score.name === name);
  if (found === undefined) throw new Error(`no score ${name}`);
  return found;
}

describe("rules", () => {
  const { whole } = scorePairs(pairs24, options);

  test("depth scores stand on pairs where either side is wet, ratio scores where both are", () => {
    const either = checkValue("a-cond-either-ge0.2").expected as { n: number; ratio_R_over_G: number };
    const both = checkValue("a-cond-both-ge0.2").expected as { n: number };
    const biasRatio = scoreOf(whole.continuous, "biasRatio");
    expect(biasRatio).toMatchObject({ n: either.n, dropped: 24 - either.n, unit: "1", best: 1 });
    expect(biasRatio.value).toBeCloseTo(either.ratio_R_over_G, 9);
    expect(scoreOf(whole.continuous, "meanLogRatioDb")).toMatchObject({ n: both.n, dropped: 24 - both.n });
  });

  test("yes-or-no scores stand on all used pairs, dry ones too", () => {
    const expected = checkValue("b-pairs24-ge1.0").expected as { a: number; d: number; CSI: number };
    const [, at1mm] = whole.thresholds;
    expect(at1mm.counts).toMatchObject({ hits: expected.a, correctNegatives: expected.d });
    expect(scoreOf(at1mm.scores, "criticalSuccessIndex")).toMatchObject({ n: 24, dropped: 0 });
  });

  test("the resolution of a gauge takes the place of a smaller threshold", () => {
    const resolutionMm = new Map([["moor\u001f007", 1]]);
    const coarse = scorePairs(pairs24, { ...options, resolutionMm });
    const expected = checkValue("a-cond-either-ge1.0").expected as { n: number };
    expect(scoreOf(coarse.whole.continuous, "biasRatio")).toMatchObject({ n: expected.n });
  });

  test("unused pairs take no part and are counted by reason", () => {
    const unused = [24, 25, 26].map((hour) =>
      pair(hour, 99, Number.NaN, {
        used: false,
        reason: hour === 26 ? "no gauge data" : "doubted: silent gauge",
      }),
    );
    const scores = scorePairs([...pairs24, ...unused], options);
    expect([scores.pairCount, scores.usedCount]).toEqual([27, 24]);
    expect(scores.unused).toEqual([
      { reason: "doubted: silent gauge", count: 2 },
      { reason: "no gauge data", count: 1 },
    ]);
    expect(scoreOf(scores.whole.continuous, "biasRatio")).toMatchObject({
      value: scoreOf(whole.continuous, "biasRatio").value,
    });
  });
});

describe("groups", () => {
  test("by range band, a border belonging to the band beyond it (check value a-range-bins)", () => {
    const bands = scorePairs(pairs24, { ...options, thresholdMm: 1e-6 }).byRange;
    const bins = checkValue("a-range-bins").expected as Record<string, { ratio_R_over_G: number; n: number }>;
    expect(bands.map(({ fromKm, toKm, pairs }) => [`${fromKm}-${toKm}`, pairs])).toEqual(
      Object.entries(bins).map(([band, { n }]) => [band, n]),
    );
    // Pairs that are dry on both sides change no ratio of sums.
    for (const band of bands) {
      const score = scoreOf(band.continuous, "biasRatio");
      expect(score.value).toBeCloseTo(bins[`${band.fromKm}-${band.toKm}`].ratio_R_over_G, 8);
    }
    const onBorder = scorePairs([pair(0, 1, 1, { rangeKm: 50 })], options).byRange;
    expect([onBorder[0].fromKm, onBorder[0].toKm]).toEqual([50, 100]);
    const beyond = scorePairs([pair(0, 1, 1, { rangeKm: 400 })], options).byRange;
    expect(beyond[0].toKm).toBe(Number.POSITIVE_INFINITY);
  });

  test("by gauge and by interval, in time order", () => {
    const two = [pair(1, 2, 1), pair(0, 4, 1), pair(1, 2, 3, { network: "saltwater" })];
    const scores = scorePairs(two, options);
    expect(scores.byGauge.map(({ network, pairs }) => [network, pairs])).toEqual([
      ["moor", 2],
      ["saltwater", 1],
    ]);
    expect(scores.byInterval.map(({ startEpochMs, gauges }) => [startEpochMs, gauges])).toEqual([
      [START, 1],
      [START + HOUR, 2],
    ]);
    expect(scoreOf(scores.byInterval[1].continuous, "biasRatio")).toMatchObject({ value: 1 });
  });
});

describe("intervals of confidence", () => {
  test("over blocks of time there must be eight that hold pairs, over gauges eight gauges", () => {
    const sevenHours = scorePairs(pairs24.slice(4, 11), options);
    const few = scoreOf(sevenHours.whole.continuous, "biasRatio");
    expect(few).toMatchObject({
      intervals: {
        timeBlocks: { low: Number.NaN, high: Number.NaN, reason: "fewer than 8 blocks of time hold pairs" },
        gauges: { low: Number.NaN, high: Number.NaN, reason: "pairs of fewer than 8 gauges" },
      },
    });
    const { whole } = scorePairs(pairs24, options);
    const { value, intervals } = scoreOf(whole.continuous, "biasRatio");
    const { low, high, level } = intervals?.timeBlocks ?? { low: value, high: value, level: 0 };
    expect(level).toBe(0.9);
    expect(low).toBeLessThan(value);
    expect(high).toBeGreaterThan(value);
  });

  test("a longer block makes fewer blocks", () => {
    const blocks = { ...options, bootstrap: { ...options.bootstrap, blockMinutes: 240 } };
    expect(scoreOf(scorePairs(pairs24, blocks).whole.continuous, "biasRatio")).toMatchObject({
      intervals: { timeBlocks: { reason: "fewer than 8 blocks of time hold pairs" } },
    });
  });

  // Nine gauges with one factor each, the same every hour: drawing hours changes nothing, drawing gauges does.
  test("time and gauges are resampled apart, each with all that belongs to it", () => {
    const factors = [0.5, 0.6, 0.7, 0.8, 0.9, 1, 1.1, 1.2, 1.3];
    const steady = factors.flatMap((factor, g) =>
      [...new Array(10).keys()].map((hour) => pair(hour, 2, 2 * factor, { gaugeId: `g${g}` })),
    );
    const { intervals } = scoreOf(scorePairs(steady, options).whole.continuous, "biasRatio");
    expect(intervals?.timeBlocks.low).toBeCloseTo(0.9, 12);
    expect(intervals?.timeBlocks.high).toBeCloseTo(0.9, 12);
    // The bootstrap's standard error is sd_pop / sqrt(9) = 0.0861, so 90 % is about 0.9 +/- 0.142.
    expect(intervals?.gauges.low).toBeGreaterThan(0.9 - 0.142 - 0.04);
    expect(intervals?.gauges.low).toBeLessThan(0.9 - 0.142 + 0.04);
    expect(intervals?.gauges.high).toBeGreaterThan(0.9 + 0.142 - 0.04);
    expect(intervals?.gauges.high).toBeLessThan(0.9 + 0.142 + 0.04);
  });
});

describe("scores.json", () => {
  const { bootstrap, pairIntervalMs, thresholdMm } = options;
  const base = { bootstrap, pairIntervalMs, thresholdMm };

  test("holds every score with its numbers, and null only with a reason", () => {
    const before = scorePairs(pairs24, options);
    const document = scoresDocument({ ...base, before, after: before });
    const read = scoresSchema.parse(JSON.parse(JSON.stringify(document)));
    expect(read.after?.basis).toBe("cross-validated");
    const [, at1mm] = read.before.whole.thresholds;
    // Check value b-pairs24-ge1.0: no false alarm, so the odds ratio has no bound.
    expect(scoreOf(at1mm.scores, "oddsRatio")).toMatchObject({ value: null, reason: "unbounded" });
    expect(scoreOf(at1mm.scores, "extremalDependencyIndex")).toMatchObject({
      value: null,
      reason: "there was no false alarm: the logarithm has no value",
    });
    // One gauge only: said once for the group, and by no score.
    expect(read.before.whole.noGauges).toBe("pairs of fewer than 8 gauges");
    const biasRatio = scoreOf(read.before.whole.continuous, "biasRatio");
    expect(biasRatio.gauges).toBeUndefined();
    expect(biasRatio.timeBlocks?.low).toBeLessThan(biasRatio.value ?? 0);
    for (const { name } of [...read.before.whole.continuous, ...at1mm.scores]) {
      expect(read.definitions[name]?.definition.length, name).toBeGreaterThan(5);
    }
  });

  test("without an adjustment says why there is nothing after it", () => {
    const document = scoresDocument({
      ...base,
      before: scorePairs(pairs24, options),
      after: { reason: "1 trusted gauges with usable pairs, 5 needed" },
    });
    expect(scoresSchema.parse(document)).toMatchObject({
      after: null,
      afterReason: "1 trusted gauges with usable pairs, 5 needed",
    });
  });

  test("stands without a single pair", () => {
    const document = scoresDocument({
      ...base,
      before: scorePairs([], options),
      after: { reason: "no pairs" },
    });
    const { whole } = scoresSchema.parse(document).before;
    expect(scoreOf(whole.continuous, "biasRatio")).toMatchObject({
      value: null,
      reason: "no pair reaches the threshold on either side",
    });
  });

  test("the schema refuses a null without a reason", () => {
    const document = scoresDocument({
      ...base,
      before: scorePairs(pairs24, options),
      after: { reason: "none" },
    });
    const changed = structuredClone(document);
    changed.before.whole.continuous[0].value = null;
    expect(scoresSchema.safeParse(changed).success).toBe(false);
  });
});
