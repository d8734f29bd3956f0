import type { Interval } from "@rainreckon/core";
import type { RateLayer } from "@rainreckon/mosaic";
import { expect, test } from "vitest";
import { blendStep, StepBlender } from "./blend.ts";
import { RadarIntegrator } from "./integrate.ts";
import { FieldSum, totalPlanes } from "./interval-sum.ts";

const MINUTE = 60_000;
const HOUR = 60 * MINUTE;
const rules = { medianRoundMs: 5 * MINUTE, maxGapMs: 12.5 * MINUTE };
const companions = [{ kind: "depth" }, { kind: "time" }, { kind: "toll" }] as const;
const shape = { cellCount: 1, headlineCells: new Int32Array(), variantCount: 0, companions };
const hour: Interval = { startEpochMs: 0, endEpochMs: HOUR };

/** One cell: rain with decibels that were added to it, the share of its beam that is blocked, a toll. */
interface Seen {
  readonly rate: number;
  readonly addedDb?: number;
  readonly blocked?: number;
  readonly toll?: number;
  readonly weight?: number;
}

function layer(minute: number, { rate, addedDb = 0, blocked = 0, toll = 0, weight = 1 }: Seen): RateLayer {
  const plane = (value: number) => (value === 0 ? undefined : Float32Array.of(value));
  return {
    sweepMidEpochMs: [minute * MINUTE],
    slot: undefined,
    rateMmPerHour: Float32Array.of(rate),
    cappedRateMmPerHour: undefined,
    beamHeightAslM: Float32Array.of(500),
    weight: Float32Array.of(weight),
    variants: [],
    companions: [plane(rate > 0 ? rate * addedDb : 0), plane(blocked), plane(toll)],
  };
}

const steady = (from: number, to: number, seen: Seen) =>
  Array.from({ length: (to - from) / 5 + 1 }, (_, k) => layer(from + 5 * k, seen));

function radarsOf(ofRadars: readonly (readonly RateLayer[])[], steps: readonly Interval[]) {
  return ofRadars.map((layers) => {
    const integrator = new RadarIntegrator(steps, rules, shape);
    for (const one of layers) integrator.add(one, { isFirst: false, isLast: false });
    return integrator;
  });
}

/** Means over the hour: decibels by depth, blocked share by time, toll in mm. */
function planesOf(...ofRadars: readonly (readonly RateLayer[])[]): number[] {
  const taken = radarsOf(ofRadars, [hour]).map((integrator) => ({ step: integrator.take(0), integrator }));
  const sum = new FieldSum(1, ofRadars.length, 0, 0, companions);
  sum.add(blendStep(hour, 0, taken, shape));
  const stored = new FieldSum(1, ofRadars.length, 0, 0, companions);
  stored.add(sum.toInterval(hour));
  return totalPlanes(stored, HOUR).companions.map((plane) => plane[0]!);
}

// By hand: 12 mm/h falls to 0 in the first half hour and stays there; 2 dB were added to the rain.
// Blocked: 0.4 in the first half hour, 0 in the second, with a ramp of 5 minutes between: 0.4 · 32.5 / 60.
test("a mean by depth knows nothing of dry time, a mean by time all of it", () => {
  const wet = Array.from({ length: 7 }, (_, k) =>
    layer(5 * k, { rate: 12 - 2 * k, addedDb: 2, blocked: 0.4 }),
  );
  const dry = steady(35, 60, { rate: 0 });
  const [addedDb, blocked, toll] = planesOf([...wet, ...dry]);
  expect(addedDb).toBeCloseTo(2, 6);
  expect(blocked).toBeCloseTo((0.4 * 32.5) / 60, 6);
  expect(toll).toBe(0);
});

// By hand: (0.75 · 6 · 1 + 0.25 · 12 · 3) / (0.75 · 6 + 0.25 · 12) = 13.5 / 7.5.
test("two radars: means by the shares of their depths and of their times", () => {
  const [addedDb, blocked] = planesOf(
    steady(0, 60, { rate: 6, addedDb: 1, blocked: 0.2, weight: 0.75 }),
    steady(0, 60, { rate: 12, addedDb: 3, weight: 0.25 }),
  );
  expect(addedDb).toBeCloseTo(1.8, 6);
  expect(blocked).toBeCloseTo(0.15, 6);
});

// By hand: the first radar alone for 40 min, half of each for 20 min.
// Depths 4 + 1 and 3 mm with 1 and 3 dB: 14 / 8. Times 50 and 10 min with 0.3 and 0.9: 24 / 60.
test("a radar that saw part of the step counts on that part only", () => {
  const [addedDb, blocked] = planesOf(
    steady(0, 60, { rate: 6, addedDb: 1, blocked: 0.3 }),
    steady(40, 60, { rate: 18, addedDb: 3, blocked: 0.9 }),
  );
  expect(addedDb).toBeCloseTo(1.75, 6);
  expect(blocked).toBeCloseTo(0.4, 6);
});

// By hand: 6 mm/h and 12 mm/h with -1 and -4 dB, 20 min each, nothing in between: (-2 - 16) / 6.
test("a gap that is not observed has no part in any mean", () => {
  const [addedDb, blocked] = planesOf([
    ...steady(0, 20, { rate: 6, addedDb: -1, blocked: 0.5 }),
    ...steady(40, 60, { rate: 12, addedDb: -4, blocked: 0.5 }),
  ]);
  expect(addedDb).toBeCloseTo(-3, 6);
  expect(blocked).toBeCloseTo(0.5, 6);
});

// By hand: rounds at 10, 15 and 30 min stand for 15 of 60 min at 12 mm/h, of the other radar one at 0 min for 2.5.
test("a toll is a round's rate for half a round on either side, whoever observed; those of all radars add up", () => {
  const unseen = { rate: Number.NaN, toll: 12 };
  const [addedDb, blocked, toll] = planesOf(
    [layer(10, unseen), layer(15, unseen), layer(30, unseen)],
    [layer(0, unseen)],
  );
  expect([addedDb, blocked]).toEqual([Number.NaN, Number.NaN]);
  expect(toll).toBeCloseTo((12 * 17.5) / 60, 6);
  const [, , beside] = planesOf(steady(0, 60, { rate: 3 }), [layer(30, { rate: 0, toll: 12 })]);
  expect(beside).toBeCloseTo(1, 6);
});

test("the first and last scan of all take their companions with them", () => {
  const integrator = new RadarIntegrator([hour], rules, shape);
  integrator.add(layer(30, { rate: 12, addedDb: 2, blocked: 0.5 }), { isFirst: true, isLast: true });
  const { depthMm, companions: planes } = integrator.take(0);
  expect(depthMm[0]).toBeCloseTo(1, 9);
  expect(planes.map((plane) => plane?.[0])).toEqual([2, expect.closeTo(0.5 / 12, 6), undefined]);
});

test("dry and unscreened, nothing is stored; where there is no depth, its mean is not known", () => {
  expect(planesOf(steady(0, 60, { rate: 0 }))).toEqual([Number.NaN, 0, 0]);
  const [integrator] = radarsOf([steady(0, 60, { rate: 3 })], [hour]);
  expect(integrator!.take(0).companions).toEqual([undefined, undefined, undefined]);
});

test("steps made in the arrays of earlier ones are the same as those made in new ones", () => {
  const steps = Array.from({ length: 12 }, (_, k) => ({
    startEpochMs: 5 * k * MINUTE,
    endEpochMs: 5 * (k + 1) * MINUTE,
  }));
  const layers = [
    [...steady(0, 20, { rate: 6, addedDb: 1, blocked: 0.5, toll: 3 }), ...steady(40, 60, { rate: 2 })],
    [...steady(5, 15, { rate: 4, addedDb: 2 }), ...steady(30, 50, { rate: 0, toll: 1 })],
  ];
  const fresh = radarsOf(layers, steps);
  const reused = radarsOf(layers, steps);
  const blender = new StepBlender(shape, 2);
  for (const [k, step] of steps.entries()) {
    const take = (integrators: readonly RadarIntegrator[]) =>
      integrators.map((integrator) => ({ step: integrator.take(k), integrator }));
    expect(blender.blend(step, k, take(reused))).toEqual(blendStep(step, k, take(fresh), shape));
    for (const integrator of reused) integrator.release();
  }
});
