import { expect, test } from "vitest";
import { chooseWindow, commonSpan, roundedWindow } from "./window.ts";

const span = (from: string, to: string) => ({
  startEpochMs: Date.parse(`2031-05-03T${from}Z`),
  endEpochMs: Date.parse(`2031-05-03T${to}Z`),
});
const ROUND = 5 * 60_000;

test.each([
  // scans from … to                  window                       by hand
  ["06:50:00", "06:59:46", "06:50:00", "07:00:00"], //            outward to five minutes
  ["06:51:00", "07:03:00", "06:50:00", "07:05:00"], //            outward, both ends
  ["11:59:40", "18:03:10", "12:00:00", "18:00:00"], //            long: to whole hours within a round
  ["12:00:06", "17:59:30", "12:00:00", "18:00:00"], //            long: outward to whole hours
  ["11:53:00", "18:20:00", "11:50:00", "18:20:00"], //            long, but no hour near: five minutes
  ["11:58:00", "12:32:00", "11:55:00", "12:35:00"], //            short: hours do not count
] as const)("%s to %s is the window %s to %s", (from, to, start, end) => {
  expect(roundedWindow(span(from, to), ROUND)).toEqual(span(start, end));
});

test("gauges narrow the window where they cover most of it, and not where they cover little", () => {
  const radars = span("12:00:00", "18:00:00");
  expect(chooseWindow(radars, span("12:30:00", "19:00:00"), ROUND)).toEqual({
    window: span("12:30:00", "18:00:00"),
    basis: "radars and gauges",
  });
  expect(chooseWindow(radars, span("17:00:00", "19:00:00"), ROUND)).toEqual({
    window: radars,
    basis: "radars",
  });
  expect(chooseWindow(radars, undefined, ROUND)).toEqual({ window: radars, basis: "radars" });
});

test("spans that only touch have no time in common", () => {
  expect(commonSpan(span("12:00:00", "13:00:00"), span("13:00:00", "14:00:00"))).toBeUndefined();
});
