import { cutWindow } from "@rainreckon/accumulation";
import { type GaugeSeries, QUALITY_DROP } from "@rainreckon/core";
import { checkValue, inputNumbers } from "@rainreckon/test-data/published";
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import type { GaugeEvidence, RadarSight } from "../evidence.ts";
import { gaugeRows } from "../gauge-table.ts";
import { makePairs } from "../pairs.ts";
import { uniformStream } from "../random.ts";
import { impossibleDepthMm } from "../reading-checks.ts";
import type { GaugeVerdict } from "../verdict.ts";
import { judgeGauges as judge, leftOutReasons } from "./judge.ts";

const MINUTE = 60_000;
const START = Date.UTC(2031, 4, 3, 12);
const HOURS = 6;
const STEPS = HOURS * 12;
const WINDOW = { startEpochMs: START, endEpochMs: START + HOURS * 60 * MINUTE };

/** A radar of which no plane is known. */
const UNKNOWN_SIGHT: RadarSight = {
  beamHeightAslM: Number.NaN,
  antennaAslM: Number.NaN,
  azimuthDeg: Number.NaN,
  blockedFraction: Number.NaN,
  blockageCorrectionDb: Number.NaN,
  attenuationCorrectionDb: Number.NaN,
  twoWayLossDb: Number.NaN,
  profileCorrectionDb: Number.NaN,
  meltingFraction: Number.NaN,
  snowFraction: Number.NaN,
  hailFraction: Number.NaN,
  convectiveFraction: Number.NaN,
  cappedFraction: Number.NaN,
  filledFraction: Number.NaN,
  screenedMm: Number.NaN,
  unseenMm: Number.NaN,
  observedFraction: Number.NaN,
  bridgedFraction: Number.NaN,
  edgeFraction: Number.NaN,
};

const judgeGauges = (gauges: readonly GaugeEvidence[]) => judge(gauges, { window: WINDOW });

interface Storm {
  readonly seed: number;
  readonly gauges: number;
  /** Scatter of a gauge's true ratio to the radar, decibels, as the half width of a uniform spread. */
  readonly scatterDb: number;
  /** Changes a gauge's readings, mm per five minutes, before they are compared. */
  readonly spoil?: (gauge: number, readings: Float64Array, radar: Float64Array) => void;
  readonly network?: (gauge: number) => string;
}

/** An invented storm of six hours over some gauges, each with its radar cell; gauges count tips of 0.2 mm. */
function storm({ seed, gauges, scatterDb, spoil, network }: Storm): GaugeEvidence[] {
  const uniform = uniformStream(seed);
  const place01 = uniformStream(seed + 1e6);
  return Array.from({ length: gauges }, (_, g) => {
    const peak = 1 + 2 * uniform();
    const radarMm = Float64Array.from(
      { length: STEPS },
      (_, k) => peak * (0.1 + Math.sin((Math.PI * k) / STEPS) ** 2 * uniform()),
    );
    const ratio = 10 ** ((scatterDb * (2 * uniform() - 1)) / 10);
    let water = 0;
    const readings = radarMm.map((depth) => {
      water += depth * ratio;
      const tips = Math.floor(water / 0.2);
      water -= tips * 0.2;
      return tips * 0.2;
    });
    spoil?.(g, readings, radarMm);
    const place = { xKm: 60 * place01(), yKm: 60 * place01() };
    return evidence(network?.(g) ?? "moor", `g${g}`, readings, radarMm, place);
  });
}

function evidence(
  network: string,
  id: string,
  depthMm: Float64Array,
  radarMm: Float64Array,
  place: { readonly xKm: number; readonly yKm: number },
): GaugeEvidence {
  const startEpochMs = depthMm.map((_, k) => START + k * 5 * MINUTE);
  const series: GaugeSeries = {
    network,
    id,
    stepMs: 5 * MINUTE,
    resolutionMm: 0.2,
    startEpochMs,
    endEpochMs: startEpochMs.map((ms) => ms + 5 * MINUTE),
    depthMm,
    quality: new Uint8Array(depthMm.length),
  };
  const radar = {
    startEpochMs: START,
    stepMs: 5 * MINUTE,
    depthMm: radarMm,
    observedFraction: new Float64Array(STEPS).fill(1),
  };
  const pairs = makePairs({
    series,
    radar,
    intervals: cutWindow(WINDOW, 60 * MINUTE),
    minCommonFraction: 0.5,
    radarId: "sabird",
    rangeKm: 42,
    beamHeightAslM: 900,
  });
  return { series, radar, whole: pairs.whole, byInterval: pairs.byInterval, sight: UNKNOWN_SIGHT, ...place };
}

const scale = (readings: Float64Array, by: number) =>
  readings.forEach((depth, k) => {
    readings[k] = depth * by;
  });
const doubted = (verdicts: readonly GaugeVerdict[]) =>
  verdicts.filter(({ verdict }) => verdict === "leave out").map(({ gaugeId }) => gaugeId);

describe("a planted fault is found, named, and found alone", () => {
  test.each([
    ["ten times too large", 10, /10 times too large/],
    ["ten times too small", 1 / 10, /10 times too small/],
    ["a hundred times too small", 1 / 100, /100 times too small/],
    ["inches read as mm", 1 / 25.4, /25.4 times too small \(inches read as mm\?\)/],
    ["mm/h read as mm per five minutes", 12, /12 times too large \(mm\/h read as mm per 5 min\?\)/],
    ["tips of 0.2 mm read as mm", 5, /5 times too large \(tips of 0.2 mm read as mm\?\)/],
  ])("%s", (_fault, factor, cause) => {
    const verdicts = judgeGauges(
      storm({
        seed: 1,
        gauges: 12,
        scatterDb: 1.5,
        spoil: (g, readings) => g === 3 && scale(readings, factor),
      }),
    );
    expect(doubted(verdicts)).toEqual(["g3"]);
    expect(verdicts[3].cause?.words).toMatch(cause);
    expect(verdicts[3].evidence).toMatch(/alike through 36 wet steps/);
  });

  test("a whole network in inches, though it has most of the gauges", () => {
    const verdicts = judgeGauges(
      storm({
        seed: 2,
        gauges: 16,
        scatterDb: 1.5,
        network: (g) => (g < 6 ? "moor" : "saltwater"),
        spoil: (g, readings) => g >= 6 && scale(readings, 1 / 25.4),
      }),
    );
    expect(doubted(verdicts)).toEqual(["g6", "g7", "g8", "g9", "g10", "g11", "g12", "g13", "g14", "g15"]);
    expect(verdicts[6].evidence).toMatch(/10 of 10 gauges of network saltwater/);
  });

  test("a dead gauge", () => {
    const verdicts = judgeGauges(
      storm({ seed: 3, gauges: 8, scatterDb: 1.5, spoil: (g, readings) => g === 5 && readings.fill(0) }),
    );
    expect(doubted(verdicts)).toEqual(["g5"]);
    expect(verdicts[5]).toMatchObject({ cause: { name: "dead" }, trusted: false });
    expect(verdicts[5].evidence).toMatch(
      /^0 mm while the radar saw \d+\.\d mm over it; 7 other gauges agree/,
    );
  });

  test("a gauge that dies in mid-storm, with the time", () => {
    const verdicts = judgeGauges(
      storm({ seed: 3, gauges: 8, scatterDb: 1.5, spoil: (g, readings) => g === 5 && readings.fill(0, 24) }),
    );
    expect(doubted(verdicts)).toEqual(["g5"]);
    expect(verdicts[5].cause?.name).toBe("dies-part-way");
    expect(verdicts[5].evidence).toContain("from 2031-05-03T14:00Z to 2031-05-03T18:00Z");
  });

  test("a single spike that the radar knows nothing of", () => {
    const verdicts = judgeGauges(
      storm({
        seed: 4,
        gauges: 8,
        scatterDb: 1.5,
        spoil: (g, readings, radar) => {
          if (g !== 2) return;
          readings.fill(0, 0, 12);
          radar.fill(0.05, 0, 12);
          readings[6] = 45;
        },
      }),
    );
    expect(doubted(verdicts)).toEqual(["g2"]);
    expect(verdicts[2].cause?.name).toBe("spike");
    expect(verdicts[2].evidence).toMatch(/^45\.0 mm in 5 min to 2031-05-03T12:35Z/);
  });

  test("a single reading at a rate hardly ever seen, in an hour of ordinary rain", () => {
    const verdicts = judgeGauges(
      storm({
        seed: 6,
        gauges: 8,
        scatterDb: 1.5,
        spoil: (g, readings) => {
          if (g === 2) readings[30] = 87;
        },
      }),
    );
    expect(doubted(verdicts)).toEqual(["g2"]);
    expect(verdicts[2].cause?.name).toBe("spike");
  });

  test("a reading beyond every record", () => {
    const verdicts = judgeGauges(
      storm({
        seed: 4,
        gauges: 8,
        scatterDb: 1.5,
        spoil: (g, readings) => {
          if (g === 2) readings[30] = 101;
        },
      }),
    );
    expect(doubted(verdicts)).toEqual(["g2"]);
    expect(verdicts[2]).toMatchObject({ cause: { name: "impossible-value" } });
  });
});

describe("what is only unusual is not doubted", () => {
  test("a sound network under any scatter of rain within a factor of three", () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 1e6 }),
        fc.double({ min: 0.1, max: 4.8, noNaN: true }),
        (seed, scatterDb) => {
          expect(doubted(judgeGauges(storm({ seed, gauges: 12, scatterDb })))).toEqual([]);
        },
      ),
      { seed: 9, numRuns: 60 },
    );
  });

  // 60 to 80 mm in one hour that the radar saw a tenth of: ten times off over the window, but in one hour only.
  test("a cloudburst over one gauge, however far from the radar and the other gauges", () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 1e6 }),
        fc.integer({ min: 0, max: 5 }),
        fc.double({ min: 3, max: 8, noNaN: true }),
        (seed, hour, perStep) => {
          const gauges = storm({
            seed,
            gauges: 12,
            scatterDb: 1.5,
            spoil: (g, readings) => {
              if (g !== 7) return;
              for (let k = 0; k < 12; k++) {
                readings[hour * 12 + k] = 0.2 * Math.round(perStep * 5 * (0.8 + (0.4 * ((k * 7) % 12)) / 11));
              }
            },
          });
          expect(doubted(judgeGauges(gauges))).toEqual([]);
        },
      ),
      { seed: 9, numRuns: 60 },
    );
  });

  test("the whole radar half or double: every gauge differs, none is wrong", () => {
    for (const factor of [0.5, 2]) {
      const gauges = storm({
        seed: 5,
        gauges: 12,
        scatterDb: 1.5,
        spoil: (_, readings) => scale(readings, factor),
      });
      expect(doubted(judgeGauges(gauges))).toEqual([]);
    }
  });

  // A hill or heavy rain in between can take four fifths of what the radar sees, all through the storm.
  test("a gauge whose radar cell is five times too low, but which agrees with the other gauges", () => {
    const gauges = storm({
      seed: 5,
      gauges: 12,
      scatterDb: 1.5,
      spoil: (g, _, radar) => g === 4 && scale(radar, 0.2),
    });
    expect(gauges[4].whole.radarMm).toBeGreaterThan(5);
    expect(doubted(judgeGauges(gauges))).toEqual([]);
  });

  test("a dry gauge where no three others speak for the radar", () => {
    const gauges = storm({
      seed: 6,
      gauges: 3,
      scatterDb: 1,
      spoil: (g, readings) => g === 0 && readings.fill(0),
    });
    expect(doubted(judgeGauges(gauges))).toEqual([]);
  });

  test("a burst that the radar saw too is no spike", () => {
    const gauges = storm({
      seed: 4,
      gauges: 8,
      scatterDb: 1,
      spoil: (g, readings, radar) => {
        if (g !== 2) return;
        readings.fill(0, 0, 12);
        radar.fill(0.05, 0, 12);
        readings[6] = 20;
        radar[6] = 4;
      },
    });
    expect(doubted(judgeGauges(gauges))).toEqual([]);
  });

  test("a cloudburst on one gauge has a rise and a fall, and is no spike", () => {
    const gauges = storm({
      seed: 4,
      gauges: 8,
      scatterDb: 1,
      spoil: (g, readings, radar) => {
        if (g !== 2) return;
        readings.set([3, 12, 30, 14, 4], 28);
        radar.set([2, 6, 8.6, 6, 2], 28);
      },
    });
    expect(doubted(judgeGauges(gauges))).toEqual([]);
  });

  test("a spike that the network itself drops is not the gauge's fault", () => {
    const [first, ...others] = storm({ seed: 4, gauges: 8, scatterDb: 1 });
    const depthMm = first.series.depthMm.slice();
    const quality = first.series.quality.slice();
    depthMm[3] = 500;
    quality[3] = QUALITY_DROP;
    const gauges = [{ ...first, series: { ...first.series, depthMm, quality } }, ...others];
    expect(doubted(judgeGauges(gauges))).toEqual([]);
  });
});

describe("too little to judge by", () => {
  test("below 5 mm of radar there is no verdict, and the gauge may be used", () => {
    const [gauge] = storm({
      seed: 1,
      gauges: 1,
      scatterDb: 0,
      spoil: (_, readings, radar) => {
        scale(radar, 0.01);
        scale(readings, 0);
      },
    });
    const [verdict] = judgeGauges([gauge]);
    expect(verdict).toMatchObject({ verdict: "too little rain to judge", trusted: true });
    expect(verdict.evidence).toMatch(/It takes 3 mm on either side/);
  });

  test("a gauge that was not compared says why", () => {
    const [gauge] = storm({
      seed: 1,
      gauges: 1,
      scatterDb: 0,
      spoil: (_, readings) => readings.fill(Number.NaN),
    });
    const [verdict] = judgeGauges([gauge]);
    expect(verdict).toMatchObject({
      verdict: "too little rain to judge",
      evidence: "Not compared: no gauge data.",
    });
  });
});

describe("overrides", () => {
  const gauges = storm({
    seed: 3,
    gauges: 8,
    scatterDb: 1.5,
    spoil: (g, readings) => g === 5 && readings.fill(0),
  });
  const override = { reason: "checked on site", by: "A. Nobody", date: "2031-05-04" };

  test("a doubted gauge is used where a person says so, and both are said", () => {
    const asked = gauges.map((gauge, g) =>
      g === 5 ? { ...gauge, override: { verdict: "use" as const, ...override } } : gauge,
    );
    const [, , , , , verdict] = judgeGauges(asked);
    expect(verdict).toMatchObject({ verdict: "leave out", trusted: true });
    expect(verdict.evidence).toContain(
      "Used all the same, by override: checked on site (A. Nobody, 2031-05-04).",
    );
  });

  test("a sound gauge is left out where a person says so", () => {
    const asked = gauges.map((gauge, g) =>
      g === 0 ? { ...gauge, override: { verdict: "leave-out" as const, ...override } } : gauge,
    );
    const verdicts = judgeGauges(asked);
    expect(verdicts[0]).toMatchObject({ verdict: "use", trusted: false });
    expect(leftOutReasons(verdicts)).toEqual(
      new Map([
        ["moor\u001fg0", "left out by override: checked on site (A. Nobody, 2031-05-04)"],
        ["moor\u001fg5", "doubted: dead"],
      ]),
    );
  });
});

describe("rows of gauges.csv", () => {
  const gauges = storm({
    seed: 3,
    gauges: 8,
    scatterDb: 1.5,
    spoil: (g, readings) => g === 5 && readings.fill(0),
  });
  const verdicts = judgeGauges(gauges);
  const rows = gaugeRows(
    gauges.map((gauge) => gauge.whole),
    verdicts,
  );

  test("hold depths, the ratio radar/gauge in decibels and the verdict", () => {
    const { gaugeMm, radarMm } = gauges[0].whole;
    expect(rows[0]).toMatchObject({
      network: "moor",
      gauge_id: "g0",
      total_mm: gaugeMm,
      radar_total_mm: radarMm,
      verdict: "use",
    });
    expect(10 ** (rows[0].ratio_db / 10)).toBeCloseTo(radarMm / gaugeMm, 9);
  });

  test("a gauge with 0 mm has no ratio", () => {
    expect(rows[5].ratio_db).toBeNaN();
    expect(rows[5].total_mm).toBe(0);
  });

  test("a verdict without a pair is a caller's mistake", () => {
    expect(() => gaugeRows([], verdicts)).toThrow(RangeError);
  });
});

// House rule h-rate-limits: sanity range of the hard limits, not a published table.
test("the limits of impossible readings are those of the house rule, for readings up to that length", () => {
  const entry = checkValue("h-rate-limits");
  const { reject_mm } = entry.expected as { reject_mm: number[] };
  expect(inputNumbers(entry, "interval_min").map(impossibleDepthMm)).toEqual(reject_mm);
  expect(impossibleDepthMm(0)).toBe(40);
  expect(impossibleDepthMm(1441)).toBe(Number.POSITIVE_INFINITY);
});
