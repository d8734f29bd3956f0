import { expect, test } from "vitest";
import { parsePosition } from "./position.ts";

test.each([
  ["51.20N 4.10E", 51.2, 4.1],
  ["4.10E 51.20N", 51.2, 4.1],
  ["51.20n,4.10w", 51.2, -4.1],
  ["33.5S; 151.25E", -33.5, 151.25],
  // By hand: 12' are a fifth of a degree, 6' a tenth, 36" a hundredth.
  ["51°12'N 4°6'36\"E", 51.2, 4.11],
  ["51° 12′ N, 4° 6′ E", 51.2, 4.1],
])("%s", (text, latDeg, lonDeg) => {
  const found = parsePosition(text);
  expect(found?.latDeg).toBeCloseTo(latDeg, 12);
  expect(found?.lonDeg).toBeCloseTo(lonDeg, 12);
});

test.each(["51.2 4.1", "51.2N", "51.2N 4.1", "51.2N 4.1N", "91N 4E", "51N 181E", "51°60'N 4E", "N E", ""])(
  "%s is no position",
  (text) => {
    expect(parsePosition(text)).toBeUndefined();
  },
);
