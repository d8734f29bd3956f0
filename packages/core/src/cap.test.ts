import { expect, test } from "vitest";
import { resolveCap } from "./cap.ts";
import { findRelation } from "./relations.ts";

const marshall = findRelation("marshall-1955-200/1.6");
const fulton = findRelation("fulton-1998-300/1.4");

// 53 dBZ with 300/1.4 is widely quoted as 103.8 mm/h (common practice); check values `cap-*` hold the digits.
test("a cap in dBZ is also a rate, and the other way round", () => {
  const set = resolveCap({ dbz: 53 }, fulton);
  expect(set.given).toBe("dbz");
  expect(set.mmPerHour).toBeCloseTo(103.8, 1);
  const back = resolveCap({ mmPerHour: set.mmPerHour }, fulton);
  expect(back.given).toBe("mmPerHour");
  expect(back.dbz).toBeCloseTo(53, 9);
});

// 56.15, 74.88 and 178.53 mm/h are the rates of the check values `cap-200-1.6-51`, `-53` and `cap-250-1.2-51`.
test.each([
  [51, marshall, /56\.2 mm\/h with Z = 200 R\^1\.6.*heavy rain is cut off/],
  [51, findRelation("rosenfeld-1993-250/1.2"), /178\.5 mm\/h.*hail is counted as rain/],
] as const)("a cap of %d dBZ outside 75 to 150 mm/h warns", (dbz, relation, text) => {
  expect(resolveCap({ dbz }, relation).warning).toMatch(text);
});

test("the custom is held to the whole mm/h", () => {
  expect(resolveCap({ dbz: 53 }, marshall)).not.toHaveProperty("warning");
  expect(resolveCap({ mmPerHour: 74.4 }, marshall).warning).toBeDefined();
  expect(resolveCap({ mmPerHour: 75 }, marshall).warning).toBeUndefined();
  expect(resolveCap({ mmPerHour: 150 }, marshall).warning).toBeUndefined();
  expect(resolveCap({ mmPerHour: 150.6 }, marshall).warning).toBeDefined();
});

test("no number, no cap", () => {
  expect(() => resolveCap({ dbz: Number.NaN }, marshall)).toThrow(RangeError);
  expect(() => resolveCap({ mmPerHour: 0 }, marshall)).toThrow(RangeError);
  expect(() => resolveCap({ mmPerHour: -5 }, marshall)).toThrow(RangeError);
});
