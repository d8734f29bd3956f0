import { describe, expect, test } from "vitest";
import { inventedStorm, LEAD_STEPS } from "../../test/invented-storm.ts";
import type { GaugeVerdict } from "../verdict.ts";
import { judgeGauges } from "./judge.ts";
import { judgeRadars } from "./judge-radars.ts";

const STORM = { seed: 11, hours: 6, gauges: 16 };

function judged(storm: Parameters<typeof inventedStorm>[0]): GaugeVerdict[] {
  const { gauges, context } = inventedStorm(storm);
  return judgeGauges(gauges, context);
}

/** The one gauge that is doubted; fails where there are others. */
function only(verdicts: readonly GaugeVerdict[], id: string): GaugeVerdict {
  const doubted = verdicts.filter(({ verdict }) => verdict === "leave out" || verdict === "use with care");
  expect(doubted.map(({ gaugeId }) => gaugeId)).toEqual([id]);
  return doubted[0] as GaugeVerdict;
}

function shift(readings: Float64Array, steps: number): void {
  const moved = readings.map((_, k) => readings[k - steps] ?? 0);
  readings.set(moved);
}

test("sound gauges under drifting showers are all used, or had too little rain", () => {
  const verdicts = judged(STORM);
  expect(new Set(verdicts.map(({ verdict }) => verdict))).toEqual(new Set(["use"]));
});

describe("what would make a gauge fit is its likely cause", () => {
  test.each([60, -60, 25])("a clock off by %d minutes", (minutes) => {
    const verdict = only(judged({ ...STORM, spoil: (g, mm) => g === 4 && shift(mm, minutes / 5) }), "g4");
    expect(verdict).toMatchObject({ verdict: "leave out", cause: { name: "clock-off", blame: "gauge" } });
    expect(Math.abs((verdict.cause?.minutesLate ?? 0) - minutes)).toBeLessThanOrEqual(5);
  });

  test("a place 16 km to the west of the one in the stations file", () => {
    const verdict = only(judged({ ...STORM, movedKm: (g) => (g === 4 ? 16 : 0) }), "g4");
    expect(verdict).toMatchObject({ verdict: "leave out", cause: { name: "misplaced" } });
    const place = verdict.findings.find(({ check }) => check === "place");
    expect(Math.abs((place?.numbers.distanceKm ?? 0) - 16)).toBeLessThan(3);
    expect(verdict.cause?.words).toContain("to the west");
  });

  test("a funnel that lets a third through", () => {
    const third = (g: number, mm: Float64Array) => {
      if (g !== 4) return;
      let tips = 0;
      mm.forEach((depth, k) => {
        const before = tips;
        tips += Math.round(depth / 0.2);
        mm[k] = 0.2 * (Math.floor(tips / 3) - Math.floor(before / 3));
      });
    };
    const verdict = only(judged({ ...STORM, spoil: third }), "g4");
    expect(verdict.cause).toMatchObject({ name: "partly-blocked", blame: "gauge" });
    expect(verdict.cause?.factor).toBeCloseTo(1 / 3, 1);
  });

  test("the readings of another gauge", () => {
    const { gauges, context } = inventedStorm(STORM);
    const copy = { ...gauges[2], series: { ...gauges[2].series, id: "copy" } };
    const verdict = only(judgeGauges([...gauges, copy], context), "copy");
    expect(verdict).toMatchObject({ verdict: "leave out", cause: { name: "duplicate" } });
    expect(verdict.evidence).toContain("those of gauge g2 of network moor");
  });

  test("a logger that repeats itself through half an hour without rain", () => {
    const stuck = (g: number, mm: Float64Array) => g === 4 && mm.fill(1.2, LEAD_STEPS + 10, LEAD_STEPS + 18);
    const verdict = judged({ ...STORM, spoil: stuck })[4];
    expect(verdict).toMatchObject({ verdict: "leave out", cause: { name: "repeated-value" } });
  });
});

describe("one cause for a whole network", () => {
  const network = (g: number) => (g < 9 ? "moor" : "saltwater");

  test("most gauges an hour late: the clock of the network, not nine gauges and not the radar", () => {
    const verdicts = judged({ ...STORM, network, spoil: (g, mm) => g < 9 && shift(mm, 12) });
    expect(new Set(verdicts.slice(0, 9).map(({ cause }) => cause?.name))).toEqual(new Set(["network-clock"]));
    expect(verdicts[0].cause?.words).toBe("whole network off: clock: 60 min late");
    expect(verdicts.slice(9).every(({ verdict }) => verdict === "use")).toBe(true);
  });

  test("all gauges of all networks an hour late: the radar's clock", () => {
    const verdicts = judged({ ...STORM, network, spoil: (_, mm) => shift(mm, 12) });
    expect(new Set(verdicts.map(({ cause }) => cause?.name))).toEqual(new Set(["radar-clock"]));
    expect(verdicts.every(({ trusted }) => trusted)).toBe(true);
  });
});

describe("where the radar is wrong over a sound gauge, the gauge is used and the radar named", () => {
  const scaled = (factor: number) => (g: number, mm: Float64Array) => {
    if (g === 4)
      mm.forEach((depth, k) => {
        mm[k] = factor * depth;
      });
  };

  test.each([
    ["blocked-sector", 0.3, { blockedFraction: 0.6 }],
    ["behind-attenuation", 0.3, { twoWayLossDb: 8 }],
    ["beam-too-high", 0.3, { beamHeightAslM: 4000 }],
    ["at-cap", 0.5, { cappedFraction: 0.4 }],
    ["hole-in-time", 0.5, { observedFraction: 0.6 }],
  ] as const)("%s", (cause, factor, sight) => {
    const verdict = judged({ ...STORM, blind: scaled(factor), sight: (g) => (g === 4 ? sight : {}) })[4];
    expect(verdict).toMatchObject({ verdict: "use", cause: { name: cause, blame: "radar" }, trusted: true });
  });

  test("all gauges alike beside the radar: its level", () => {
    const half = (_: number, mm: Float64Array) =>
      mm.forEach((depth, k) => {
        mm[k] = 0.5 * depth;
      });
    const verdicts = judged({ ...STORM, blind: half });
    expect(new Set(verdicts.map(({ cause }) => cause?.name))).toEqual(new Set(["radar-level"]));
  });
});

describe("parts of a long window", () => {
  const LONG = { seed: 5, hours: 96, gauges: 6, field: false };
  const day = 24 * 12;

  test("a clock that is an hour late from the second day on", () => {
    const late = (g: number, mm: Float64Array) => {
      if (g !== 3) return;
      const from = LEAD_STEPS + day;
      mm.set(mm.slice(from - 12, mm.length - 12), from);
    };
    const verdict = only(judged({ ...LONG, spoil: late }), "g3");
    expect(verdict.cause).toMatchObject({ name: "clock-off", minutesLate: 60 });
  });

  test("a gauge that stood still for one day of four", () => {
    const still = (g: number, mm: Float64Array) =>
      g === 3 && mm.fill(0, LEAD_STEPS + day, LEAD_STEPS + 2 * day);
    expect(only(judged({ ...LONG, spoil: still }), "g3").cause?.name).toBe("dies-part-way");
  });
});

describe("a radar beside its trusted gauges", () => {
  const radars = (blind?: (g: number, mm: Float64Array) => void) => {
    const { gauges, context } = inventedStorm({ ...STORM, ...(blind === undefined ? {} : { blind }) });
    const verdicts = judgeGauges(gauges, context);
    return judgeRadars(gauges, verdicts, {
      radarIds: ["sabird", "other"],
      rangeBandsKm: [50, 100],
      overlaps: [
        { oneSiteId: "other", otherSiteId: "sabird", valueDb: 3, standardErrorDb: 0.3, sampleCount: 500 },
      ],
    });
  };

  test("is used where it agrees with them, but for a neighbour that shows twice as much", () => {
    const [own, other] = radars();
    expect(own.whole.gauges).toBe(16);
    expect(own.whole.ratio).toBeGreaterThan(0.95);
    expect(own.whole.ratio).toBeLessThan(1.05);
    expect(own.byRange.map(({ label }) => label)).toEqual(["0-50 km"]);
    expect(own.bySector.map(({ label }) => label)).toEqual(["NE"]);
    expect(own.overTime).toHaveLength(6);
    expect(own).toMatchObject({
      verdict: "use with care",
      againstNeighbours: [{ differenceDb: -3, n: 500 }],
    });
    expect(other).toMatchObject({
      verdict: "too little rain to judge",
      againstNeighbours: [{ differenceDb: 3 }],
    });
  });

  test("is used with care at half of their rain, and left out at a tenth", () => {
    const times = (factor: number) => (_: number, mm: Float64Array) =>
      mm.forEach((depth, k) => {
        mm[k] = factor * depth;
      });
    expect(radars(times(0.5))[0]).toMatchObject({ verdict: "use with care", cause: { name: "radar-level" } });
    expect(radars(times(0.1))[0]).toMatchObject({ verdict: "leave out", cause: { name: "radar-level" } });
  });
});
