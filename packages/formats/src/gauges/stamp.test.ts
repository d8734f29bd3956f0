import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { isAmbiguousDate, StampScanner } from "./stamp.ts";

const scan = (text: string) => {
  const scanner = new StampScanner();
  const read = scanner.scan(text);
  return { read, clockMs: scanner.clockMs, offsetMinutes: scanner.offsetMinutes, problem: scanner.problem };
};

describe("stamps", () => {
  // Expected instants: Date.parse of the ECMAScript date time string format, written out in full.
  test.each([
    ["2031-05-03T12:05", "2031-05-03T12:05:00.000Z", Number.NaN],
    ["2031-05-03 12:05", "2031-05-03T12:05:00.000Z", Number.NaN],
    ["2031-05-03 12:05:07", "2031-05-03T12:05:07.000Z", Number.NaN],
    ["2031-05-03T12:05:07.5Z", "2031-05-03T12:05:07.500Z", 0],
    ["2031-05-03T12:05:07,25", "2031-05-03T12:05:07.250Z", Number.NaN],
    ["2031-05-03T12:05:00+01:00", "2031-05-03T12:05:00.000Z", 60],
    ["2031-05-03T12:05-0330", "2031-05-03T12:05:00.000Z", -210],
    ["2031-05-03 12:05 UTC", "2031-05-03T12:05:00.000Z", 0],
    ["2031-12-31T24:00", "2032-01-01T00:00:00.000Z", Number.NaN],
    ["2028-02-29T00:00", "2028-02-29T00:00:00.000Z", Number.NaN],
  ])("%s", (text, clock, offset) => {
    expect(scan(text)).toEqual({
      read: true,
      clockMs: Date.parse(clock),
      offsetMinutes: offset,
      problem: "",
    });
  });

  test("digits beyond the millisecond round up, so that no stamp slips over a border", () => {
    expect(scan("2031-05-03T12:04:59.9999Z").clockMs).toBe(Date.parse("2031-05-03T12:05:00Z"));
    expect(scan("2031-05-03T12:05:00.0001Z").clockMs).toBe(Date.parse("2031-05-03T12:05:00.001Z"));
  });

  test.each([
    ["03.05.2031 12:05", "day and month can be mistaken for each other"],
    ["5/3/2031 12:05", "day and month can be mistaken for each other"],
    ["2031-05-03", "no time of day"],
    ["2031-02-29T00:00", "no such date or time of day"],
    ["2031-13-01T00:00", "no such date or time of day"],
    ["2031-05-03T24:01", "no such date or time of day"],
    ["2031-05-03T12:60", "no such date or time of day"],
    ["0203-05-03T12:00", "the year 203 cannot be meant"],
    ["2031-05-03T12:05 noon", "not a time like 2031-05-03T12:05"],
    ["2031-05-03T12", "not a time like 2031-05-03T12:05"],
    ["", "not a time like 2031-05-03T12:05"],
    ["yesterday", "not a time like 2031-05-03T12:05"],
  ])("%j is refused: %s", (text, problem) => {
    expect(scan(text)).toMatchObject({ read: false, problem });
  });

  test("one scanner reads stamp after stamp, and a repeated one the same again", () => {
    const scanner = new StampScanner();
    expect([scanner.scan("2031-05-03T12:05"), scanner.clockMs]).toEqual([true, Date.UTC(2031, 4, 3, 12, 5)]);
    expect([scanner.scan("2031-05-03T12:05"), scanner.clockMs]).toEqual([true, Date.UTC(2031, 4, 3, 12, 5)]);
    expect([scanner.scan("no"), scanner.scan("no")]).toEqual([false, false]);
    expect(scanner.clockMs).toBeNaN();
  });

  test("every ISO string that JavaScript writes is read as what JavaScript reads", () => {
    fc.assert(
      fc.property(
        fc.date({
          min: new Date(Date.UTC(1800, 0, 1)),
          max: new Date(Date.UTC(2299, 11, 31)),
          noInvalidDate: true,
        }),
        (date) => {
          expect(scan(date.toISOString()).clockMs).toBe(date.getTime());
        },
      ),
    );
  });

  test("dates that leave day and month open are recognised", () => {
    expect(["3/5/2031", "03.05.31", "2031-05-03", "12:30"].map(isAmbiguousDate)).toEqual([
      true,
      true,
      false,
      false,
    ]);
  });
});
