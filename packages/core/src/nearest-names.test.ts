import { expect, test } from "vitest";
import { editDistance, nearestNames } from "./nearest-names.ts";

// The example by which the distance is usually taught: three steps (k to s, e to i, and a g).
test.each([
  ["kitten", "sitting", 3],
  ["", "abc", 3],
  ["abc", "", 3],
  ["same", "same", 0],
])("from %j to %j are %d steps", (from, to, steps) => {
  expect(editDistance(from, to)).toBe(steps);
  expect(editDistance(to, from)).toBe(steps);
});

test("nearest first, equally near ones in their order, case does not count", () => {
  expect(nearestNames("WINDOV", ["zone", "window", "windows", "widow"], 2)).toEqual(["window", "windows"]);
});

test("a name of a million characters takes no time to speak of", () => {
  expect(nearestNames("x".repeat(1_000_000), ["a", "b"], 1)).toEqual(["a"]);
});
