import { checkValue, checkValues } from "@rainreckon/test-data/published";
import { Duration } from "luxon";
import { describe, expect, test } from "vitest";
import { rainDays } from "./rain-day.ts";
import { cutWindow, durationMs } from "./steps.ts";

const utc = (text: string) => Date.parse(text);

describe("rainDays", () => {
  // Reference book, section h: bounds of local days by Python's zoneinfo (IANA time zone database).
  test.each(
    checkValues("h-")
      .filter(({ id }) => id.startsWith("h-local-day-"))
      .map((entry) => [entry.id, entry] as const),
  )("%s: a day that follows the clock has the length the clock gives it", (_id, entry) => {
    const { zone, date } = entry.inputs as { zone: string; date: string };
    const expected = entry.expected as { hours: number; start_utc: string; end_utc: string };
    const noon = utc(expected.start_utc) + 10 * 3.6e6;
    const days = rainDays(
      { startEpochMs: noon, endEpochMs: noon + 60_000 },
      { hour: 0, zone, dst: "follow", label: "start" },
    );
    expect(days).toHaveLength(1);
    expect(days[0]).toEqual({
      date,
      startEpochMs: utc(expected.start_utc),
      endEpochMs: utc(expected.end_utc),
    });
    expect((days[0].endEpochMs - days[0].startEpochMs) / 3.6e6).toBe(expected.hours);
  });

  test("h-clim-day: the date of rain in days from 06 to 06 UTC, by both ways of naming them", () => {
    const entry = checkValue("h-clim-day");
    const { times } = entry.inputs as { times: string[] };
    const expected = entry.expected as { stamp_by_end: string[]; stamp_by_start: string[] };
    for (const [label, dates] of [
      ["end", expected.stamp_by_end],
      ["start", expected.stamp_by_start],
    ] as const) {
      const found = times.map((time) => {
        const at = utc(time.replace("Z", ":00Z"));
        const rule = { hour: 6, zone: "UTC", dst: "follow", label } as const;
        return rainDays({ startEpochMs: at - 60_000, endEpochMs: at }, rule)[0].date;
      });
      expect(found).toEqual(dates);
    }
  });

  test("standard time all year keeps every day at 24 h across the clock change", () => {
    const days = rainDays(
      { startEpochMs: utc("2024-03-29T12:00:00Z"), endEpochMs: utc("2024-04-02T12:00:00Z") },
      { hour: 7, zone: "Europe/Zurich", dst: "never", label: "end" },
    );
    expect(days.map((day) => (day.endEpochMs - day.startEpochMs) / 3.6e6)).toEqual([24, 24, 24, 24, 24]);
    // 07:00 Central European Time is 06:00 UTC, in summer too.
    for (const day of days) expect(new Date(day.startEpochMs).getUTCHours()).toBe(6);
  });

  test("a zone that does not exist is a range error", () => {
    expect(() =>
      rainDays(
        { startEpochMs: 0, endEpochMs: 1 },
        { hour: 6, zone: "Mars/Crater", dst: "follow", label: "end" },
      ),
    ).toThrow(/no such time zone/);
  });
});

describe("cutWindow and durationMs", () => {
  test("hours begin at full hours UTC; the first and last piece may be shorter", () => {
    const pieces = cutWindow(
      { startEpochMs: utc("2024-05-08T06:50:00Z"), endEpochMs: utc("2024-05-08T08:10:00Z") },
      durationMs("PT1H"),
    );
    expect(pieces.map((piece) => (piece.endEpochMs - piece.startEpochMs) / 60_000)).toEqual([10, 60, 10]);
  });

  test.each(["PT5M", "PT1H", "P1D", "PT1H30M", "PT90S", "P1DT2H3M4S"])(
    "%s is as long as luxon says",
    (iso) => {
      expect(durationMs(iso)).toBe(Duration.fromISO(iso).toMillis());
    },
  );

  test.each(["", "P", "PT", "PT0M", "5M", "P1M", "-PT5M", "PT1.5H"])("%j is no duration", (iso) => {
    expect(durationMs(iso)).toBeNaN();
  });
});
