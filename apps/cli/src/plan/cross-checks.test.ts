import { expect, test } from "vitest";
import { parsePlan } from "./load.ts";

function plan(window: string, intervals: string, pairs: string): string {
  return [
    "title: Invented",
    `window: ${window}`,
    "scans: [none/*.h5]",
    "radars: [{ id: zzeve, medianRoundMinutes: 5, maxGapMinutes: 12.5 }]",
    `intervals: ${intervals}`,
    `pairs: ${pairs}`,
    "grid: { crs: EPSG:32631, westM: 0, northM: 0, cellM: 1000, nx: 1, ny: 1 }",
  ].join("\n");
}

const WINDOW = "{ from: 2031-10-25T00:00:00Z, to: 2031-10-27T00:00:00Z, zone: UTC }";

test.each([
  ["9:00 is no multiple of four hours", "PT4H", "{ hour: 9, zone: UTC, dst: follow, label: start }"],
  // Oslo's clock goes back on 26 October 2031: 10:00 is 08:00 UTC before, and 09:00 after.
  [
    "the clock changes within the window",
    "PT2H",
    "{ hour: 10, zone: Europe/Oslo, dst: follow, label: start }",
  ],
])("rain days that start within a step are refused, as they would lose it: %s", (_, step, rainDay) => {
  const intervals = `{ series: ${step}, grids: ${step}, rainDay: ${rainDay} }`;
  expect(() => parsePlan(plan(WINDOW, intervals, `{ interval: ${step} }`), "plan.yaml")).toThrow(
    /rain days at \d+:00 in .* start within a step of PT\dH \(plan\.yaml, line 5, intervals\.rainDay\)/,
  );
});

test.each([
  // Midnight in a zone 5 h 30 min ahead is 18:30 UTC, and 8:00 there is 02:30 UTC: whole hours from one another.
  [
    "a window and rain days at half past",
    "{ from: 2031-05-03T18:30:00Z, to: 2031-05-04T18:30:00Z, zone: Asia/Kolkata }",
    "PT1H",
    "{ hour: 8, zone: Asia/Kolkata, dst: never, label: end }",
  ],
  ["standard time all year", WINDOW, "PT1H", "{ hour: 9, zone: Europe/Oslo, dst: never, label: end }"],
])("rain days on steps are taken: %s", (_, window, step, rainDay) => {
  const intervals = `{ series: ${step}, grids: ${step}, rainDay: ${rainDay} }`;
  const { rainDay: taken } = parsePlan(
    plan(window, intervals, `{ interval: ${step} }`),
    "plan.yaml",
  ).intervals;
  expect(taken?.label).toBe("end");
});
