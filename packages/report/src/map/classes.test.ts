import { expect, test } from "vitest";
import { classIndex, depthClasses, fractionClasses, heightClasses } from "./classes.ts";

/** Relative luminance of sRGB: WCAG 2.2, definition of relative luminance. */
function luminance([r, g, b]: readonly number[]): number {
  const linear = (c: number) => (c / 255 <= 0.04045 ? c / 255 / 12.92 : ((c / 255 + 0.055) / 1.055) ** 2.4);
  return 0.2126 * linear(r) + 0.7152 * linear(g) + 0.0722 * linear(b);
}

const field = Float32Array.from({ length: 1000 }, (_, i) => (i % 10 === 0 ? Number.NaN : (i / 999) * 42));

test("edges are round, ascending, and end below what was observed", () => {
  const { edges } = depthClasses([field]);
  expect(edges).toEqual([0, 0.1, 1, 5, 10, 15, 20, 25, 30, 35, 40]);
});

test("a value belongs to the last edge that it reaches", () => {
  const classes = depthClasses([field]);
  expect(classes.labels[classIndex(classes, 0)]).toBe("none, or below 0.1");
  expect(classes.labels[classIndex(classes, 4.99)]).toBe("1 – 5");
  expect(classes.labels[classIndex(classes, 5)]).toBe("5 – 10");
  expect(classes.labels[classIndex(classes, 500)]).toBe("≥ 40");
});

// Ordered lightness is what keeps a ramp readable in grey and under colour blindness.
test.each([
  ["depth", depthClasses([field]).colours.slice(1), -1],
  ["observed share", fractionClasses().colours, 1],
  ["beam height", heightClasses(Float32Array.of(100, 3200)).colours, -1],
] as const)("%s: each class is further along in lightness than the one before", (_, colours, direction) => {
  const lightness = colours.map(luminance);
  for (let i = 1; i < lightness.length; i += 1) {
    expect((lightness[i] - lightness[i - 1]) * direction).toBeGreaterThan(0);
  }
});

test("a field without any observation still has classes", () => {
  expect(depthClasses([new Float32Array(4).fill(Number.NaN)]).edges[0]).toBe(0);
  expect(depthClasses([]).colours.length).toBeGreaterThan(1);
});
