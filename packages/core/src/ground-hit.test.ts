import { expect, test } from "vitest";
import { beamAboveArc, effectiveRadiusM } from "./beam.ts";
import { groundHit } from "./ground-hit.ts";

const radiusM = effectiveRadiusM();
const flat = { stepM: 500, heightAslM: new Float64Array(400) };

test("a beam that looks down from a tower meets the plain where geometry says", () => {
  // On a plain, h + r sin(e) + r2 / 2R = 0 for small angles: here 100 m and -0.5 degrees, 11.6 km.
  const hit = groundHit(flat, 100, -0.5, radiusM)!;
  const slope = Math.sin((0.5 * Math.PI) / 180);
  const parabola = radiusM * (slope - Math.sqrt(slope ** 2 - (2 * 100) / radiusM));
  expect(Math.abs(hit.slantRangeM - parabola)).toBeLessThan(30);
  expect(Math.abs(hit.heightAslM)).toBeLessThan(0.1);
});

test("a hill is met before it is passed; unknown points hide nothing", () => {
  const heightAslM = new Float64Array(400);
  heightAslM[99] = 2000;
  const hit = groundHit({ stepM: 500, heightAslM }, 100, 0.5, radiusM)!;
  expect(hit.arcM).toBeGreaterThan(49_500);
  expect(hit.arcM).toBeLessThanOrEqual(50_000);
  expect(hit.heightAslM).toBeCloseTo(100 + beamAboveArc(hit.arcM, 0.5, radiusM).heightM, 9);
  heightAslM[99] = Number.NaN;
  expect(groundHit({ stepM: 500, heightAslM }, 100, 0.5, radiusM)).toBeUndefined();
});

test("a first point that already stands in the beam is the place", () => {
  const heightAslM = Float64Array.of(500, 0);
  expect(groundHit({ stepM: 1000, heightAslM }, 100, 0, radiusM)?.arcM).toBe(1000);
});
