import { expect, test } from "vitest";
import { timeTicks, windowWords } from "./times.ts";

const utc = (text: string) => Date.parse(text);
const plain = (text: string) => text.replaceAll("\u00a0", " ");

// IANA time zone database: Europe/Amsterdam went from UTC+1 to UTC+2 at 2024-03-31T01:00Z and back at
// 2024-10-27T01:00Z; Asia/Kolkata is UTC+5:30 all year.
test("a window on one day says its date once, and both clocks", () => {
  const words = windowWords(
    { startEpochMs: utc("2024-07-12T12:00Z"), endEpochMs: utc("2024-07-12T18:00Z") },
    "Europe/Amsterdam",
  );
  expect(plain(words.local)).toBe("12 July 2024 14:00 to 20:00");
  expect(words.zone).toBe("Europe/Amsterdam, UTC+2");
  expect(words.utc).toBe("12:00 to 18:00");
});

test("where local and UTC dates differ, UTC has its dates", () => {
  const words = windowWords(
    { startEpochMs: utc("2024-07-11T20:00Z"), endEpochMs: utc("2024-07-12T02:00Z") },
    "Asia/Kolkata",
  );
  expect(plain(words.local)).toBe("12 July 2024 01:30 to 07:30");
  expect(words.zone).toBe("Asia/Kolkata, UTC+5:30");
  expect(plain(words.utc)).toBe("11 July 2024 20:00 to 12 July 2024 02:00");
});

test("a change of the clock within the window is named", () => {
  const words = windowWords(
    { startEpochMs: utc("2024-10-26T22:00Z"), endEpochMs: utc("2024-10-27T23:00Z") },
    "Europe/Amsterdam",
  );
  expect(words.zone).toBe("Europe/Amsterdam, UTC+2, then UTC+1");
  expect(plain(words.local)).toBe("27 October 2024 00:00 to 28 October 2024 00:00");
});

test("UTC is not said twice", () => {
  const window = { startEpochMs: utc("2024-07-12T12:00Z"), endEpochMs: utc("2024-07-12T18:00Z") };
  expect(windowWords(window, "UTC").localIsUtc).toBe(true);
  expect(windowWords(window, "UTC+01:00").localIsUtc).toBe(false);
  expect(windowWords(window, "UTC+01:00").zone).toBe("UTC+1");
});

test("marks stand on round local hours, also on the day of 23 hours", () => {
  const ticks = timeTicks(
    { startEpochMs: utc("2024-03-30T23:00Z"), endEpochMs: utc("2024-03-31T22:00Z") },
    "Europe/Amsterdam",
    4,
  );
  expect(ticks.map(({ local }) => local)).toEqual(["31 Mar", "06:00", "12:00", "18:00", "1 Apr"]);
  // 06:00 is five hours after midnight that day.
  expect(ticks.map(({ utc: text }) => text)).toEqual(["23:00", "04:00", "10:00", "16:00", "22:00"]);
});

test("marks in a zone of half hours stand on its own round hours", () => {
  const window = { startEpochMs: utc("2024-07-12T00:00Z"), endEpochMs: utc("2024-07-12T03:00Z") };
  expect(timeTicks(window, "Asia/Kolkata", 4).map(({ local }) => local)).toEqual(["06:00", "07:00", "08:00"]);
});

test("a zone that does not exist is refused", () => {
  expect(() => windowWords({ startEpochMs: 0, endEpochMs: 1 }, "Mars/Base")).toThrow(RangeError);
});
