import { expect, test } from "vitest";
import { cfTimeUnits } from "./cf-time.ts";

// Instants worked out by Date.parse, which knows ISO 8601.
test.each([
  ["seconds since 2023-08-01T20:00:00Z", 1000, "2023-08-01T20:00:00Z"],
  ["seconds since 2020-03-12", 1000, "2020-03-12T00:00:00Z"],
  ["hours since 1970-1-1 0:00:00", 3_600_000, "1970-01-01T00:00:00Z"],
  ["minutes since 1990-01-01 12:30:15.25 UTC", 60_000, "1990-01-01T12:30:15.250Z"],
  // CF 1.11, section 4.4, has this form of a zone in its example "seconds since 1992-10-8 15:15:42.5 -6:00".
  ["seconds since 1992-10-8 15:15:42.5 -6:00", 1000, "1992-10-08T21:15:42.500Z"],
  ["days since 2000-02-29 00:00 +0130", 86_400_000, "2000-02-28T22:30:00Z"],
] as const)("%s", (units, stepMs, origin) => {
  expect(cfTimeUnits(units, undefined)).toEqual({ stepMs, originEpochMs: Date.parse(origin) });
});

test.each([
  ["seconds", undefined],
  ["fortnights since 2000-01-01", undefined],
  ["months since 2000-01-01", undefined],
  ["seconds since 2001-02-29", undefined],
  ["seconds since 2001-13-01", undefined],
  ["seconds since 1800-01-01", undefined],
  ["seconds since 2001-01-01 25:00:00", undefined],
  ["days since 2001-01-01", "noleap"],
  [`seconds since ${"9".repeat(100_000)}`, undefined],
] as const)("%.40s in calendar %s is no unit of time here", (units, calendar) => {
  expect(cfTimeUnits(units, calendar)).toBeUndefined();
});
