import { Duration } from "luxon";
import { expect, test } from "vitest";
import { durationMs } from "./duration.ts";

test.each(["PT5M", "PT1H", "P1D", "PT1H30M", "PT90S", "P1DT2H3M4S"])(
  "%s is as long as luxon says",
  (text) => {
    expect(durationMs(text)).toBe(Duration.fromISO(text).toMillis());
  },
);

test.each(["PT0M", "P", "PT", "5M", "P1M", "PT-5M", ""])("%j is no duration here", (text) => {
  expect(durationMs(text)).toBeNaN();
});
