import { expect, test } from "vitest";
import { type DurationMaximum, durationMaxima } from "./depth-duration.ts";
import { type EventRule, rainEvents } from "./rain-events.ts";
import { antecedentDepth, depthOfSteps, type RainSeries } from "./rain-series.ts";

const NO = Number.NaN;
const STEP_MS = 300_000;

function series(depthMm: readonly number[], capped: readonly number[] = []): RainSeries {
  return {
    startEpochMs: 0,
    stepMs: STEP_MS,
    depthMm: Float64Array.from(depthMm),
    observedFraction: Float64Array.from(depthMm, (mm) => (Number.isNaN(mm) ? 0 : 1)),
    atCap: Uint8Array.from(depthMm, (_, k) => (capped.includes(k) ? 1 : 0)),
  };
}

const RULE: EventRule = { dryTimeMs: 3 * STEP_MS, minDepthMm: 0, wetMm: 0.1, minObserved: 0.9 };
const spans = (of: RainSeries, rule: Partial<EventRule> = {}) =>
  rainEvents(of, { ...RULE, ...rule }).events.map(({ steps }) => [steps.from, steps.to]);

test("a step that nobody saw is neither wet nor dry: it ends nothing and is counted within the event", () => {
  // Two dry steps and two unseen ones: the dry time of three is not reached.
  const { events } = rainEvents(series([1, 0, NO, NO, 0, 1]), RULE);
  expect(events.map(({ steps, unseenSteps }) => [steps, unseenSteps])).toEqual([[{ from: 0, to: 6 }, 2]]);
  expect(events[0].observedFraction).toBeCloseTo(4 / 6, 12);
  expect(spans(series([1, 0, NO, 0, 0, 1]))).toEqual([
    [0, 1],
    [5, 6],
  ]);
});

test("a step without rain that was seen in part only is not dry", () => {
  const half = series([1, 0, 0, 0, 1]);
  half.observedFraction[2] = 0.5;
  expect(spans(half)).toEqual([[0, 5]]);
  expect(spans(half, { minObserved: 0.5 })).toEqual([
    [0, 1],
    [4, 5],
  ]);
});

test("what lies within a dry time of the ends may be longer than is known", () => {
  const known = (depths: number[]) =>
    rainEvents(series(depths), RULE).events.map((event) => [event.mayBeginEarlier, event.mayEndLater]);
  expect(known([0, 0, 0, 1, 0, 0, 0])).toEqual([[false, false]]);
  expect(known([0, 0, 1, 0, 0])).toEqual([[true, true]]);
});

test("events below the least depth are dropped and counted; nothing is an event where it never rains", () => {
  const { events, dropped } = rainEvents(series([0.2, 0.1, 0, 0, 0, 4]), { ...RULE, minDepthMm: 0.31 });
  expect(events.map(({ depthMm }) => depthMm)).toEqual([4]);
  expect(dropped.count).toBe(1);
  expect(dropped.depthMm).toBeCloseTo(0.3, 12);
  // 0.1 + 0.2 is 0.3, whatever binary makes of it.
  expect(rainEvents(series([0.1, 0.2]), { ...RULE, minDepthMm: 0.3 }).events).toHaveLength(1);
  expect(rainEvents(series([0, 0, NO]), RULE)).toEqual({ events: [], dropped: { count: 0, depthMm: 0 } });
});

// By hand, in steps of 5 minutes: 2 4 3 | 0 1 5. Sliding over 15 minutes the sums are 9, 7, 4, 6; between the
// clock's quarters 9 and 6. Over 10 minutes 6, 7, 3, 1, 6; from minute 0 on 6, 3, 6.
const WORKED = [2, 4, 3, 0, 1, 5];
const most = (durations: number[], options = {}, of = series(WORKED)) =>
  durationMaxima(
    of,
    durations.map((minutes) => minutes * 60_000),
    options,
  ).map((found) => ("reason" in found ? found.reason : [found.startEpochMs / STEP_MS, found.depthMm]));

test("a worked case: rolling and clock-aligned maxima", () => {
  expect(most([5, 10, 15, 30])).toEqual([
    [5, 5],
    [1, 7],
    [0, 9],
    [0, 15],
  ]);
  expect(most([5, 10, 15], { clockAnchorEpochMs: 0 })).toEqual([
    [5, 5],
    [0, 6],
    [0, 9],
  ]);
  // Counted from minute 5: whole quarters begin at steps 1 only (4 + 3 + 0).
  expect(most([15], { clockAnchorEpochMs: STEP_MS })).toEqual([[1, 7]]);
});

test("maxima of an event share a step with it, and reach beyond it where they are longer", () => {
  expect(most([10, 20], { sharing: { from: 4, to: 6 } })).toEqual([
    [4, 6],
    [2, 9],
  ]);
});

test("durations that cannot be told say why", () => {
  expect(most([7, 35])).toEqual(["no whole number of steps of 5 min", "longer than what is known"]);
  expect(most([10], {}, series([NO, NO, NO]))).toEqual(["not observed"]);
  expect(most([30], { clockAnchorEpochMs: STEP_MS })).toEqual([
    "no whole clock interval of this length lies in what is known",
  ]);
});

test("a maximum seen in part, or at the cap, says so", () => {
  const [found] = durationMaxima(series([3, NO, 2], [2]), [3 * STEP_MS]) as DurationMaximum[];
  expect(found).toMatchObject({ depthMm: 5, atCap: true });
  expect(found.observedFraction).toBeCloseTo(2 / 3, 12);
  // A dry step at the cap is none: the mark belongs to rain.
  expect(depthOfSteps(series([0, 1], [0]), { from: 0, to: 2 }).atCap).toBe(false);
});

test("antecedent rain counts what lies before the series as not seen", () => {
  expect(antecedentDepth(series([1, 2, 4]), 2 * STEP_MS, 4 * STEP_MS)).toEqual({
    startEpochMs: -2 * STEP_MS,
    endEpochMs: 2 * STEP_MS,
    depthMm: 3,
    observedFraction: 0.5,
    atCap: false,
  });
  expect(antecedentDepth(series([1, 2]), 0, 4 * STEP_MS)).toMatchObject({ depthMm: NO, observedFraction: 0 });
});
