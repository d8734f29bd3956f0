import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { ringCrossing } from "./ring-crossing.ts";

type Ring = (readonly [number, number])[];
const close = (...points: Ring): Ring => [...points, points[0]];

describe("rings that are simple, or only touch themselves", () => {
  test.each<[string, Ring]>([
    ["square", close([0, 0], [1, 0], [1, 1], [0, 1])],
    ["clockwise", close([0, 1], [1, 1], [1, 0], [0, 0])],
    ["concave", close([0, 0], [4, 0], [4, 4], [2, 1], [0, 4])],
    ["repeated positions", close([0, 0], [0, 0], [1, 0], [1, 1], [1, 1], [0, 1])],
    ["positions on a straight edge", close([0, 0], [1, 0], [2, 0], [2, 2], [0, 2])],
    // Two cells that meet at a corner, as catchments drawn from a raster often do.
    ["two cells touching in a vertex", close([0, 0], [1, 0], [1, 1], [2, 1], [2, 2], [1, 2], [1, 1], [0, 1])],
    ["a vertex touching an edge from inside", close([0, 0], [4, 0], [4, 4], [2, 0], [0, 4])],
    [
      "comb",
      close([0, 0], [9, 0], [9, 1], [1, 1], [1, 2], [9, 2], [9, 3], [1, 3], [1, 4], [9, 4], [9, 5], [0, 5]),
    ],
  ])("%s", (_name, ring) => {
    expect(ringCrossing(ring)).toBeUndefined();
  });
});

describe("rings that cross themselves", () => {
  test.each<[string, Ring, readonly (readonly [number, number])[]]>([
    ["bow tie", close([0, 0], [2, 2], [2, 0], [0, 2]), [[1, 1]]],
    [
      "crossing in a vertex that both parts have",
      close([0, 0], [1, 1], [2, 2], [2, 0], [1, 1], [0, 2]),
      [[1, 1]],
    ],
    ["an edge through a vertex", close([0, 0], [2, 2], [2, 0], [1, 1], [0, 2]), [[1, 1]]],
    ["two edges along each other", close([0, 0], [4, 0], [4, 2], [3, 0], [1, 0], [0, 2]), [[1, 0]]],
    [
      "a loop",
      close([0, 0], [10, 0], [10, 10], [5, 10], [5, -1], [4, -1], [4, 10], [0, 10]),
      [
        [5, 0],
        [4, 0],
      ],
    ],
  ])("%s", (_name, ring, at) => {
    expect(at).toContainEqual(ringCrossing(ring));
  });
});

test("star-shaped rings never cross themselves, whatever their shape", () => {
  fc.assert(
    fc.property(
      fc.array(fc.double({ min: 0.2, max: 1, noNaN: true }), { minLength: 3, maxLength: 60 }),
      (radii) => {
        const ring = radii.map((radius, index): readonly [number, number] => {
          const angle = (2 * Math.PI * index) / radii.length;
          return [radius * Math.cos(angle), radius * Math.sin(angle)];
        });
        expect(ringCrossing(close(...ring))).toBeUndefined();
      },
    ),
  );
});

test("exchanging two neighbours of a regular polygon makes it cross itself", () => {
  fc.assert(
    fc.property(fc.integer({ min: 4, max: 40 }), fc.nat(), (count, pick) => {
      const ring = Array.from({ length: count }, (_, index): readonly [number, number] => {
        const angle = (2 * Math.PI * index) / count;
        return [Math.cos(angle), Math.sin(angle)];
      });
      const at = pick % (count - 1);
      [ring[at], ring[at + 1]] = [ring[at + 1], ring[at]];
      expect(ringCrossing(close(...ring))).toBeDefined();
    }),
  );
});

test("a ring with too many pairs of edges to compare is said to be so", () => {
  const comb = close([0, 0], [9, 0], [9, 1], [1, 1], [1, 2], [9, 2], [9, 3], [0, 3]);
  expect(ringCrossing(comb, 3)).toBe("too-intricate");
  expect(ringCrossing(comb, 64)).toBeUndefined();
});
