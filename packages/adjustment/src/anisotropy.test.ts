import type { Grid } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { anisotropyOf, stretched } from "./anisotropy.ts";
import { scattered } from "./invented-gauges.ts";
import { radarVariogram } from "./radar-variogram.ts";

const grid: Grid = { crs: "plane", westM: 0, northM: 100_000, cellM: 1000, nx: 100, ny: 100 };

/** Blobs of rain, so many km long along an azimuth and wide across it. */
function blobs(azimuthDeg: number, alongKm: number, acrossKm: number): Float32Array {
  const azimuth = (azimuthDeg * Math.PI) / 180;
  const centres = Array.from(
    { length: 25 },
    (_, i) => [100 * scattered(i, 0), 100 * scattered(i, 1)] as const,
  );
  return Float32Array.from({ length: 10_000 }, (_, cell) => {
    const [x, y] = [(cell % 100) + 0.5, 99.5 - Math.floor(cell / 100)];
    return centres.reduce((sum, [cx, cy]) => {
      const along = (x - cx) * Math.sin(azimuth) + (y - cy) * Math.cos(azimuth);
      const across = (x - cx) * Math.cos(azimuth) - (y - cy) * Math.sin(azimuth);
      return sum + 20 * Math.exp(-((along / alongKm) ** 2) - (across / acrossKm) ** 2);
    }, 0);
  });
}

describe("the direction along which a radar field keeps together", () => {
  // The truth is what the fields were made of.
  test.each([30, 90, 150])("is found at azimuth %d°", (azimuthDeg) => {
    const found = radarVariogram(grid, blobs(azimuthDeg, 30, 8), "spherical")?.anisotropy;
    expect(Math.abs((found?.azimuthDeg ?? Number.NaN) - azimuthDeg)).toBeLessThanOrEqual(15);
    expect(found?.ratio).toBeLessThanOrEqual(0.5);
  });

  test("is none where blobs are round", () => {
    expect(radarVariogram(grid, blobs(0, 12, 12), "spherical")?.anisotropy).toBeUndefined();
  });

  test("is none where nothing varies", () => {
    const places = { xKm: [0, 1, 2, 3], yKm: [0, 5, 1, 2] };
    expect(anisotropyOf(places, [3, 3, 3, 3], "spherical", 10)).toBeUndefined();
  });
});

// By hand: with the long axis to the east, 3 km north become 6 km under a ratio of a half.
test("stretched places measure distances as the model does", () => {
  const { xKm, yKm } = stretched({ xKm: [0, 4], yKm: [0, 3] }, { azimuthDeg: 90, ratio: 0.5 });
  expect(xKm[1] - xKm[0]).toBeCloseTo(4, 12);
  expect(Math.abs(yKm[1] - yKm[0])).toBeCloseTo(6, 12);
});
