import { cutWindow } from "@rainreckon/accumulation";
import { expect, test } from "vitest";
import type { JobRadar } from "./job.ts";
import { cutIntoUnits, MAX_INTERVALS_PER_UNIT, MIN_ROUNDS_PER_UNIT } from "./units.ts";

const MINUTE = 60_000;
const HOUR = 60 * MINUTE;
const DAY = 24 * HOUR;

/** Of a radar, only the times of its rounds matter here. */
function radarWithRounds(minutes: readonly number[]): JobRadar {
  const rounds = minutes.map((minute) => ({ firstMidEpochMs: minute * MINUTE }));
  return { rounds } as unknown as JobRadar;
}

function unitsOf(days: number, minutes: readonly number[]) {
  const window = { startEpochMs: 0, endEpochMs: days * DAY };
  const intervals = cutWindow(window, HOUR);
  return { intervals, units: cutIntoUnits(intervals, 5 * MINUTE, [radarWithRounds(minutes)]) };
}

test("every interval is in one unit, in order, whatever the rounds", () => {
  for (const every of [5, 6, 30, 600]) {
    const { intervals, units } = unitsOf(
      3,
      Array.from({ length: (3 * 1440) / every }, (_, k) => (k + 1) * every),
    );
    expect(units.flatMap((unit) => unit.intervals)).toEqual(intervals);
    for (const unit of units) {
      expect(unit.steps[0]?.startEpochMs).toBe(unit.intervals[0]?.startEpochMs);
      expect(unit.steps.at(-1)?.endEpochMs).toBe(unit.intervals.at(-1)?.endEpochMs);
    }
  }
});

test("a unit holds a dozen rounds at least: an hour of a radar that turns every 5 minutes, two every 10", () => {
  const every = (minutes: number) =>
    unitsOf(
      1,
      Array.from({ length: 1440 / minutes }, (_, k) => (k + 1) * minutes),
    ).units;
  expect(every(5).map((unit) => unit.intervals.length)).toEqual(new Array(24).fill(1));
  expect(every(10).map((unit) => unit.intervals.length)).toEqual(new Array(12).fill(2));
  expect(MIN_ROUNDS_PER_UNIT).toBe(12);
});

test("a radar that is silent for a month does not put a month of intervals into one unit", () => {
  // Two hours of scans, then nothing for 30 days, of which a unit would hold all fields in memory.
  const { intervals, units } = unitsOf(
    30,
    Array.from({ length: 24 }, (_, k) => (k + 1) * 5),
  );
  expect(units.flatMap((unit) => unit.intervals)).toEqual(intervals);
  for (const unit of units) expect(unit.intervals.length).toBeLessThanOrEqual(MAX_INTERVALS_PER_UNIT);
});
