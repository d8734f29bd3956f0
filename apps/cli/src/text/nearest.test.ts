import { expect, test } from "vitest";
import { editDistance, nearest } from "./nearest.ts";

test.each([
  // from       to          edits  origin
  ["kitten", "sitting", 3], //     usual textbook case of Levenshtein's distance
  ["ca", "ac", 1], //              one swap of neighbours, the case Damerau added
  ["", "abc", 3], //               by hand
  ["same", "same", 0], //          by hand
] as const)("%s to %s takes %d edits", (from, to, edits) => {
  expect(editDistance(from, to)).toBe(edits);
  expect(editDistance(to, from)).toBe(edits);
});

test("a misspelt word finds its neighbour, a foreign one finds none", () => {
  const known = ["survey", "plan", "total", "relate", "compare"];
  expect(nearest("toatl", known)).toBe("total");
  expect(nearest("SURVEY", known)).toBe("survey");
  expect(nearest("comp", known)).toBe("compare");
  expect(nearest("umbrella", known)).toBeUndefined();
  expect(nearest("x".repeat(1000), known)).toBeUndefined();
});
