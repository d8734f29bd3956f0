import fc from "fast-check";
import { expect, test } from "vitest";
import { type StoredRays, sortRays } from "./rays.ts";

const plain: StoredRays = {
  rayCount: 4,
  elevationDeg: 0.5,
  startEpochMs: 1_000_000,
  endEpochMs: 1_008_000,
  firstRay: 0,
  clockwise: true,
  originDeg: 0,
};

// Expected values follow from the definitions in ODIM_H5 2.3 (EUMETNET OPERA, 2019), worked out by hand.

test("rays without azimuths are spread evenly, and their times run from start to end", () => {
  const rays = sortRays(plain);
  expect([...rays.azimuthDeg]).toEqual([45, 135, 225, 315]);
  expect([...rays.rayElevationDeg]).toEqual([0.5, 0.5, 0.5, 0.5]);
  expect([...rays.rayTimeEpochMs]).toEqual([1_001_000, 1_003_000, 1_005_000, 1_007_000]);
  expect(rays.rayTimesDerived).toBe(true);
  expect(rays.raysReordered).toBe(0);
  expect(rays.fileRow).toBeUndefined();
});

test("times begin with the ray that was measured first, in the antenna's sense of turning", () => {
  expect([...sortRays({ ...plain, firstRay: 3 }).rayTimeEpochMs]).toEqual([
    1_003_000, 1_005_000, 1_007_000, 1_001_000,
  ]);
  expect([...sortRays({ ...plain, firstRay: 1, clockwise: false }).rayTimeEpochMs]).toEqual([
    1_003_000, 1_001_000, 1_007_000, 1_005_000,
  ]);
});

test("the origin turns the evenly spread rays, and a ray over north comes first", () => {
  const rays = sortRays({ ...plain, originDeg: -45 });
  expect([...rays.azimuthDeg]).toEqual([0, 90, 180, 270]);
  expect(rays.raysReordered).toBe(0);
});

test("the middle of a ray over north is north, in either sense of turning", () => {
  const clockwise = sortRays({
    ...plain,
    startAzimuthDeg: Float64Array.of(315, 45, 135, 225),
    stopAzimuthDeg: Float64Array.of(45, 135, 225, 315),
  });
  expect([...clockwise.azimuthDeg]).toEqual([0, 90, 180, 270]);
  const counter = sortRays({
    ...plain,
    clockwise: false,
    startAzimuthDeg: Float64Array.of(10, 280, 190, 100),
    stopAzimuthDeg: Float64Array.of(350, 260, 170, 80),
  });
  expect([...counter.azimuthDeg]).toEqual([0, 90, 180, 270]);
  expect([...(counter.fileRow ?? [])]).toEqual([0, 3, 2, 1]);
  expect(counter.raysReordered).toBe(2);
});

test("rays out of order are sorted with their times and elevations, and counted", () => {
  const rays = sortRays({
    ...plain,
    startAzimuthDeg: Float64Array.of(180, 270, 0, 90),
    stopAzimuthDeg: Float64Array.of(182, 272, 2, 92),
    rayElevationDeg: Float64Array.of(1, 2, 3, 4),
    startTimeS: Float64Array.of(1000, 1002, 1004, 1006),
    stopTimeS: Float64Array.of(1002, 1004, 1006, 1008),
  });
  expect([...rays.azimuthDeg]).toEqual([1, 91, 181, 271]);
  expect([...rays.rayElevationDeg]).toEqual([3, 4, 1, 2]);
  expect([...rays.rayTimeEpochMs]).toEqual([1_005_000, 1_007_000, 1_001_000, 1_003_000]);
  expect(rays.rayTimesDerived).toBe(false);
  expect(rays.raysReordered).toBe(4);
  expect(rays.remarks).toEqual([]);
});

test("a ray without azimuth has no place: it is left out and counted", () => {
  const rays = sortRays({
    ...plain,
    startAzimuthDeg: Float64Array.of(0, Number.NaN, 180, 270),
    stopAzimuthDeg: Float64Array.of(2, 92, 182, -9999),
  });
  expect([...rays.azimuthDeg]).toEqual([1, 181]);
  expect([...(rays.fileRow ?? [])]).toEqual([0, 2]);
  expect(rays.raysReordered).toBe(0);
  expect(rays.remarks).toEqual(["2 rays have no azimuth and are left out."]);
});

test("what is given ray by ray but does not fit is said and not used", () => {
  const rays = sortRays({
    ...plain,
    startAzimuthDeg: Float64Array.of(0, 90),
    rayElevationDeg: Float64Array.of(1, 1, 1, 200),
    startTimeS: Float64Array.of(1000, 1002, 1004, 99_999),
    stopTimeS: Float64Array.of(1002, 1004, 1006, 99_999),
  });
  expect([...rays.azimuthDeg]).toEqual([45, 135, 225, 315]);
  expect([...rays.rayElevationDeg]).toEqual([0.5, 0.5, 0.5, 0.5]);
  expect(rays.rayTimesDerived).toBe(true);
  expect(rays.remarks).toHaveLength(3);
});

test("start azimuths alone are widened to the middle of the ray", () => {
  const rays = sortRays({ ...plain, startAzimuthDeg: Float64Array.of(0, 90, 180, 270) });
  expect([...rays.azimuthDeg]).toEqual([45, 135, 225, 315]);
  expect(rays.remarks).toHaveLength(1);
});

test("turning the order of the file does not change what is seen where", () => {
  fc.assert(
    fc.property(fc.integer({ min: 2, max: 720 }), fc.integer({ min: 0, max: 719 }), (rayCount, turn) => {
      const step = 360 / rayCount;
      const start = Float64Array.from({ length: rayCount }, (_, i) => ((i + turn) % rayCount) * step);
      const stop = start.map((azimuth) => azimuth + step);
      const rays = sortRays({ ...plain, rayCount, startAzimuthDeg: start, stopAzimuthDeg: stop });
      expect(rays.azimuthDeg).toHaveLength(rayCount);
      rays.azimuthDeg.forEach((azimuth, i) => {
        expect(azimuth).toBeCloseTo((i + 0.5) * step, 9);
      });
    }),
    { numRuns: 50, seed: 7 },
  );
});
