import { expect, test } from "vitest";
import {
  arcDistanceM,
  beamAboveArc,
  beamHeightM,
  EARTH_RADIUS_M,
  effectiveRadiusFactor,
  effectiveRadiusM,
  gateGeometry,
  refractivityGradientPerKm,
  STANDARD_RADIUS_FACTOR,
} from "./beam.ts";

const radiusM = effectiveRadiusM();

test("gates of a sweep: range, height and arc of each centre", () => {
  // Check values `beam-h-0.5deg-50km`, `beam-h-0.5deg-100km` and the arcs of the same gates.
  const gates = gateGeometry({ firstGateCentreM: 50_000, gateLengthM: 50_000, gateCount: 2 }, 0.5, radiusM);
  expect([...gates.slantRangeM]).toEqual([50_000, 100_000]);
  expect(gates.heightM[0]).toBeCloseTo(583.4578911217, 2);
  expect(gates.heightM[1]).toBeCloseTo(1461.132502816, 2);
  expect(gates.arcM[0]).toBeCloseTo(49_994.95088463, 2);
  expect(gates.arcM[1]).toBeCloseTo(99_981.30372405, 2);
});

test("place from arc and back, by range, elevation and refraction", () => {
  for (const factor of [1, STANDARD_RADIUS_FACTOR, 2.5]) {
    const radius = effectiveRadiusM(factor);
    for (const elevationDeg of [-0.5, 0, 0.5, 4.3, 25, 60]) {
      for (const slantRangeM of [250, 12_345, 250_000]) {
        const arcM = arcDistanceM(slantRangeM, elevationDeg, radius);
        const place = beamAboveArc(arcM, elevationDeg, radius);
        expect(place.slantRangeM).toBeCloseTo(slantRangeM, 4);
        expect(place.heightM).toBeCloseTo(beamHeightM(slantRangeM, elevationDeg, radius), 4);
      }
    }
  }
});

test("straight up, height is range and the ground does not move", () => {
  expect(beamHeightM(10_000, 90, radiusM)).toBeCloseTo(10_000, 6);
  expect(arcDistanceM(10_000, 90, radiusM)).toBeCloseTo(0, 6);
});

test("a beam does not get to the other side of the earth", () => {
  expect(beamAboveArc(radiusM * 2, 0.5, radiusM).slantRangeM).toBeNaN();
  expect(beamAboveArc(radiusM * 2, 0.5, radiusM).heightM).toBeNaN();
});

test("factor and gradient undo each other; no gradient is a factor of 1", () => {
  expect(effectiveRadiusFactor(0)).toBe(1);
  for (const factor of [0.8, 1, STANDARD_RADIUS_FACTOR, 3]) {
    expect(effectiveRadiusFactor(refractivityGradientPerKm(factor))).toBeCloseTo(factor, 10);
  }
});

test("trapped rays and factors below 0 are refused", () => {
  // 1 / 6371 km is 157 N-units per km: the curvature of the earth itself.
  expect(() => effectiveRadiusFactor(-1e9 / EARTH_RADIUS_M)).toThrow(RangeError);
  expect(() => effectiveRadiusFactor(Number.NaN)).toThrow(RangeError);
  expect(() => effectiveRadiusM(0)).toThrow(RangeError);
  expect(() => effectiveRadiusM(Number.POSITIVE_INFINITY)).toThrow(RangeError);
});
