import { expect, test } from "vitest";
import { effectiveRadiusM } from "../../beam.ts";
import { type BlockedSweep, terrainBlockage } from "./terrain-blockage.ts";
import { type TerrainRays, terrainCaution } from "./terrain-model.ts";

const sweep: BlockedSweep = {
  elevationDeg: 0.5,
  azimuthDeg: Float64Array.from({ length: 360 }, (_, ray) => ray + 0.5),
  gateCount: 40,
  firstGateCentreM: 500,
  gateLengthM: 1000,
  beamWidthDeg: 1,
  antennaHeightM: 100,
};
/** At 10 km and 0.5 degrees the beam's centre is 93.2 m up (Doviak and Zrnic 1993, eq. 2.28b), its radius 87.27 m. */
const WALL_AT_M = 10_000;
const edge = (overRadius: number) => 100 + 93.2 + overRadius * 87.266;

/** Flat ground far below, and a wall from 350 to 10 degrees, 10 km away. */
function wall(heightAslM: number): TerrainRays {
  const [rayCount, pointCount, stepM] = [720, 200, 200];
  const heights = new Float32Array(rayCount * pointCount);
  for (let ray = 0; ray < rayCount; ray++) {
    if (ray <= 20 || ray >= 700) heights[ray * pointCount + WALL_AT_M / stepM - 1] = heightAslM;
  }
  return { rayCount, pointCount, stepM, heightAslM: heights, uncoveredPoints: 0 };
}

// Shares: 0.5 (1 + erf(sqrt(8 ln2) y / 2a)), computed independently (scipy); 1 by hand of a wall far above the beam.
test.each([
  [-0.5, 0.202548],
  [0, 0.5],
  [0.5, 1 - 0.202548],
  [20, 1],
])("a wall %d beam radii above the beam's centre takes %d of all echo behind it", (overRadius, share) => {
  const fraction = terrainBlockage(wall(edge(overRadius)), sweep, effectiveRadiusM());
  // Rays on both sides of north.
  for (const ray of [0, 5, 354, 359]) {
    expect(fraction[ray * 40 + 9]).toBe(0);
    for (const gate of [10, 11, 39]) expect(Math.abs(fraction[ray * 40 + gate]! - share)).toBeLessThan(1e-3);
  }
  expect(fraction[90 * 40 + 39]).toBe(0);
  // At the wall's end the beam is half in front of it, half beside it.
  if (share === 1) expect(fraction[10 * 40 + 39]).toBeCloseTo(0.17, 1);
});

test("an edge below the half-power beam hides nothing, so a plain is no obstacle", () => {
  const plain = { ...wall(0), heightAslM: new Float32Array(720 * 200).fill(70) };
  expect(terrainBlockage(plain, sweep, effectiveRadiusM()).every((share) => share === 0)).toBe(true);
  expect(terrainBlockage(wall(edge(-1.01)), sweep, effectiveRadiusM()).every((share) => share === 0)).toBe(
    true,
  );
});

test("terrain that is not known hides nothing, is not known where nothing nearer is, and is counted", () => {
  const terrain = wall(edge(0));
  terrain.heightAslM.fill(Number.NaN, 0, 720 * 100);
  for (let ray = 360; ray < 720; ray++) terrain.heightAslM.fill(Number.NaN, ray * 200 + 60, (ray + 1) * 200);
  const fraction = terrainBlockage(terrain, sweep, effectiveRadiusM());
  expect(fraction[90 * 40 + 39]).toBeNaN();
  // Behind the wall at 10 km terrain ends at 12 km: what the wall takes stays taken.
  expect(fraction[354 * 40 + 39]).toBeCloseTo(0.5, 2);
  expect(terrainCaution(wall(0))).toBeUndefined();
  expect(terrainCaution({ ...terrain, uncoveredPoints: 72_000 })).toMatch(/does not cover 50 %/);
  expect(terrainCaution({ ...terrain, uncoveredPoints: 1 })).toMatch(/less than 1 %/);
  expect(terrainCaution({ ...terrain, uncoveredPoints: 144_000 })).toMatch(/at all/);
});

test("the tower's own hill is left out", () => {
  const hill = { ...wall(0), heightAslM: new Float32Array(720 * 200) };
  for (let ray = 0; ray < 720; ray++) hill.heightAslM.fill(120, ray * 200, ray * 200 + 2);
  expect(terrainBlockage(hill, sweep, effectiveRadiusM()).every((share) => share === 0)).toBe(true);
});
