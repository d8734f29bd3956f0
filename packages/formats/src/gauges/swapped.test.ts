import { expect, test } from "vitest";
import { looksSwapped } from "./swapped.ts";

const radars = [{ lonDeg: 4, latDeg: 51.5 }];

test.each([
  [4.1, 51.2, false, "at its place"],
  [51.2, 4.1, true, "exchanged"],
  [80, 10, false, "far away either way"],
  // 3 degrees of latitude are 333.6 km on a sphere of 6371 km (1 degree is 111.19 km), 2.5 are 278 km.
  [54.5, 4, false, "exchanged, and still too far"],
  [54, 4, true, "exchanged, and near enough"],
  [51, 120, false, "exchanged, it is no nearer, and as given it is no latitude"],
  [Number.NaN, 4, false, "no position"],
])("%d, %d: %s (%s)", (lon, lat, expected, _why) => {
  expect(looksSwapped(lon, lat, radars)).toBe(expected);
});

test("no radar, no opinion", () => {
  expect(looksSwapped(51.2, 4.1, [])).toBe(false);
});
