import { InputError } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { ZoneClock } from "./zone-clock.ts";

const utc = (text: string) => Date.parse(text.endsWith("Z") ? text : `${text}Z`);
const instants = (clock: ZoneClock, local: string) => {
  const count = clock.resolve(utc(local));
  if (count === 0) return [];
  return count === 1 ? [clock.earlierMs] : [clock.earlierMs, clock.laterMs];
};

describe("instants of wall-clock times", () => {
  // Python 3.11 zoneinfo with IANA tz 2025b: both folds of the local time that come back to it.
  test.each([
    ["Europe/Zurich", "2024-03-31T01:59", ["2024-03-31T00:59Z"]],
    ["Europe/Zurich", "2024-03-31T02:30", []],
    ["Europe/Zurich", "2024-03-31T03:00", ["2024-03-31T01:00Z"]],
    ["Europe/Zurich", "2024-10-27T02:00", ["2024-10-27T00:00Z", "2024-10-27T01:00Z"]],
    ["Europe/Zurich", "2024-10-27T02:59", ["2024-10-27T00:59Z", "2024-10-27T01:59Z"]],
    ["Europe/Zurich", "2024-10-27T03:00", ["2024-10-27T02:00Z"]],
    ["America/New_York", "2024-03-10T02:30", []],
    ["America/New_York", "2024-11-03T01:30", ["2024-11-03T05:30Z", "2024-11-03T06:30Z"]],
    ["America/New_York", "2024-11-03T02:00", ["2024-11-03T07:00Z"]],
    ["Australia/Lord_Howe", "2024-04-07T01:29", ["2024-04-06T14:29Z"]],
    ["Australia/Lord_Howe", "2024-04-07T01:30", ["2024-04-06T14:30Z", "2024-04-06T15:00Z"]],
    ["Australia/Lord_Howe", "2024-04-07T01:45", ["2024-04-06T14:45Z", "2024-04-06T15:15Z"]],
    ["Australia/Lord_Howe", "2024-04-07T02:00", ["2024-04-06T15:30Z"]],
    ["Australia/Lord_Howe", "2024-10-06T02:15", []],
    ["Australia/Lord_Howe", "2024-10-06T02:30", ["2024-10-05T15:30Z"]],
    ["Asia/Kolkata", "2024-07-01T00:00", ["2024-06-30T18:30Z"]],
    ["America/St_Johns", "2024-11-03T01:15", ["2024-11-03T03:45Z", "2024-11-03T04:45Z"]],
    ["Pacific/Chatham", "2024-04-07T03:00", ["2024-04-06T13:15Z", "2024-04-06T14:15Z"]],
    ["Pacific/Apia", "2011-12-30T12:00", []],
    ["Asia/Kathmandu", "1986-01-01T00:10", []],
  ])("%s %s", (zone, local, expected) => {
    const clock = new ZoneClock(zone, "follow");
    expect(instants(clock, local)).toEqual(expected.map(utc));
    // Again, from what it remembers of the hour.
    expect(instants(clock, local)).toEqual(expected.map(utc));
  });

  // Offsets of standard time: IANA tz, files europe, australasia, northamerica. Dublin keeps Greenwich time in winter.
  test.each([
    ["Europe/Zurich", "2024-07-01T12:00", "2024-07-01T11:00Z"],
    ["Europe/Zurich", "2024-03-31T02:30", "2024-03-31T01:30Z"],
    ["Europe/Zurich", "2024-10-27T02:30", "2024-10-27T01:30Z"],
    ["Europe/Dublin", "2024-07-01T12:00", "2024-07-01T12:00Z"],
    ["Australia/Lord_Howe", "2024-01-01T12:00", "2024-01-01T01:30Z"],
    ["Australia/Sydney", "2024-01-01T12:00", "2024-01-01T02:00Z"],
    ["America/New_York", "2024-07-01T12:00", "2024-07-01T17:00Z"],
  ])("%s on its standard time all year: %s", (zone, local, expected) => {
    expect(instants(new ZoneClock(zone, "never"), local)).toEqual([utc(expected)]);
  });

  test.each([
    ["UTC", "2024-07-01T12:00Z"],
    ["UTC+01:00", "2024-07-01T11:00Z"],
    ["+0530", "2024-07-01T06:30Z"],
    ["UTC-3", "2024-07-01T15:00Z"],
  ])("fixed offset %s", (zone, expected) => {
    expect(instants(new ZoneClock(zone, "follow"), "2024-07-01T12:00")).toEqual([utc(expected)]);
  });

  test.each(["Europe/Atlantis", "GMT+1", "UTC+19:00", ""])(
    "%j is no zone, and the message says what is",
    (zone) => {
      expect(() => new ZoneClock(zone, "follow")).toThrow(InputError);
      expect(() => new ZoneClock(zone, "follow")).toThrow(`"${zone}" is no time zone`);
    },
  );
});
