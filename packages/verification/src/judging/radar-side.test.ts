import { describe, expect, test } from "vitest";
import { CLEAR_SIGHT, inventedStorm } from "../../test/invented-storm.ts";
import { judgeGauges } from "./judge.ts";
import { neighbourIndices } from "./neighbours.ts";
import { radarSide } from "./radar-side.ts";
import { weightedMedian } from "./reference-level.ts";

describe("the radar's side", () => {
  test("a radar with nothing wrong explains nothing, in neither direction", () => {
    expect(radarSide(CLEAR_SIGHT, 10, 5)).toBeUndefined();
    expect(radarSide(CLEAR_SIGHT, -10, 15)).toBeUndefined();
  });

  // A bright band makes the radar read too much: it cannot explain a gauge that has more than the radar.
  test.each([
    ["bright-band", { meltingFraction: 0.8 }, -10],
    ["hail", { hailFraction: 0.5 }, -10],
    ["behind-attenuation", { twoWayLossDb: 9 }, 10],
    ["blocked-sector", { blockageCorrectionDb: 3 }, 10],
    ["beam-too-high", { snowFraction: 0.9 }, 10],
    ["below-detection", { unseenMm: 4 }, 10],
    ["at-cap", { cappedFraction: 0.5 }, 10],
  ] as const)("%s works in one direction only", (cause, sight, excessMm) => {
    expect(radarSide({ ...CLEAR_SIGHT, ...sight }, excessMm, 5)?.cause).toBe(cause);
    expect(radarSide({ ...CLEAR_SIGHT, ...sight }, -excessMm, 5)).toBeUndefined();
  });

  test("of several symptoms the strongest speaks", () => {
    const sight = { ...CLEAR_SIGHT, twoWayLossDb: 4, blockedFraction: 0.65 };
    expect(radarSide(sight, 10, 5)).toMatchObject({
      cause: "blocked-sector",
      numbers: { blockedFraction: 0.65 },
    });
  });

  test("planes that are not known explain nothing", () => {
    const unknown = Object.fromEntries(Object.keys(CLEAR_SIGHT).map((name) => [name, Number.NaN]));
    expect(radarSide({ ...CLEAR_SIGHT, ...unknown }, 10, 5)).toBeUndefined();
  });
});

test("a weighted median is the value at which half of the weight is reached", () => {
  expect(weightedMedian([3, 1, 2], [1, 1, 1])).toBe(2);
  expect(weightedMedian([3, 1, 2], [5, 1, 1])).toBe(3);
  expect(weightedMedian([], [])).toBeNaN();
});

test("neighbours that all agree are never divided by: what counts is the difference", () => {
  expect(neighbourIndices(1.5, [0, 0, 0, 0], [1, 2, 3, 4])).toMatchObject({
    quartileIndex: Number.NaN,
    madZ: Number.NaN,
    standsOut: false,
  });
});

test("two gauges with the same fault are no network at fault", () => {
  const { gauges, context } = inventedStorm({
    seed: 11,
    hours: 6,
    gauges: 16,
    network: (g) => (g < 2 ? "moor" : "saltwater"),
    spoil: (g, mm) => {
      if (g < 2) mm.set(mm.map((_, k) => mm[k - 12] ?? 0));
    },
  });
  const causes = judgeGauges(gauges, context).map(({ cause }) => cause?.name);
  expect(causes.slice(0, 2)).toEqual(["clock-off", "clock-off"]);
});
