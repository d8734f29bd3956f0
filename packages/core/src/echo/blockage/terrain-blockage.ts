import { beamAboveArc, beamDiameterM } from "../../beam.ts";
import { gaussianBlockedFraction } from "../../blockage.ts";
import type { TerrainRays } from "./terrain-model.ts";

/** A sweep as terrain meets it. */
export interface BlockedSweep {
  readonly elevationDeg: number;
  /** Shape [rayCount], ascending. */
  readonly azimuthDeg: Float64Array;
  readonly gateCount: number;
  readonly firstGateCentreM: number;
  readonly gateLengthM: number;
  readonly beamWidthDeg: number;
  readonly antennaHeightM: number;
}

/** Terrain nearer than this is left out: the radar stands on it, often on a tower that no terrain model knows. */
const NEAREST_M = 500;

/**
 * Share of the beam's echo that terrain takes on the way to each gate.
 *
 * A Gaussian beam weighted both ways meets, at each point of the terrain rays, an obstacle with a level edge (Bech,
 * Codina, Lorente and Bebbington 2003, J. Atmos. Oceanic Technol. 20, 845-855); along a ray the share never falls, and
 * across it rays are averaged with the beam's own weight. As in that paper, an edge at or below the half-power beam
 * hides nothing, or every plain would count as an obstacle. Terrain within 500 m is left out (house rule).
 *
 * @param radiusM - of the effective earth, from `effectiveRadiusM`
 * @returns shape [rayCount * gateCount], 0 to 1; NaN where nothing is known of the terrain up to the gate. A gate
 *   behind terrain that is not known has what nearer terrain takes
 */
export function terrainBlockage(terrain: TerrainRays, sweep: BlockedSweep, radiusM: number): Float32Array {
  const { gateCount, azimuthDeg, beamWidthDeg } = sweep;
  const alongFan = fanBlockage(terrain, sweep, radiusM);
  const spacingDeg = 360 / terrain.rayCount;
  const reach = Math.max(1, Math.ceil(beamWidthDeg / spacingDeg));
  const fraction = new Float32Array(azimuthDeg.length * gateCount);
  const share = new Float64Array(gateCount);
  const weight = new Float64Array(gateCount);
  for (let ray = 0; ray < azimuthDeg.length; ray++) {
    share.fill(0);
    weight.fill(0);
    const nearest = Math.round((azimuthDeg[ray] as number) / spacingDeg);
    for (let k = nearest - reach; k <= nearest + reach; k++) {
      const offWidths = (k * spacingDeg - (azimuthDeg[ray] as number)) / beamWidthDeg;
      const w = Math.exp(-8 * Math.LN2 * offWidths * offWidths);
      const row = ((k + terrain.rayCount) % terrain.rayCount) * gateCount;
      for (let gate = 0; gate < gateCount; gate++) {
        const here = alongFan[row + gate] as number;
        if (Number.isNaN(here)) continue;
        share[gate] = (share[gate] as number) + w * here;
        weight[gate] = (weight[gate] as number) + w;
      }
    }
    for (let gate = 0; gate < gateCount; gate++) {
      // 0 / 0, where nothing is known, is NaN.
      fraction[ray * gateCount + gate] = (share[gate] as number) / (weight[gate] as number);
    }
  }
  return fraction;
}

/** The blocked share along each terrain ray, at the sweep's gates. Shape [terrain.rayCount * gateCount]. */
function fanBlockage(terrain: TerrainRays, sweep: BlockedSweep, radiusM: number): Float32Array {
  const { pointCount, stepM, rayCount, heightAslM } = terrain;
  const { gateCount, gateLengthM, firstGateCentreM } = sweep;
  const centreAslM = new Float64Array(pointCount);
  const beamRadiusM = new Float64Array(pointCount);
  // The first gate whose centre lies at or behind the point.
  const gateOf = new Int32Array(pointCount);
  let used = 0;
  for (let point = 0; point < pointCount; point++) {
    const { slantRangeM, heightM } = beamAboveArc((point + 1) * stepM, sweep.elevationDeg, radiusM);
    if (!(slantRangeM > 0)) break;
    centreAslM[point] = sweep.antennaHeightM + heightM;
    beamRadiusM[point] = beamDiameterM(slantRangeM, sweep.beamWidthDeg) / 2;
    gateOf[point] = Math.max(0, Math.ceil((slantRangeM - firstGateCentreM) / gateLengthM));
    if ((gateOf[point] as number) >= gateCount) break;
    used = point + 1;
  }
  const first = Math.max(0, Math.ceil(NEAREST_M / stepM) - 1);
  const along = new Float32Array(rayCount * gateCount).fill(Number.NaN);
  for (let ray = 0; ray < rayCount; ray++) {
    // The nearest terrain hides nothing, where it is known at all.
    const near = heightAslM.subarray(ray * pointCount, ray * pointCount + first);
    let highest = near.every(Number.isNaN) ? Number.NaN : 0;
    let gate = 0;
    for (let point = first; point < used; point++) {
      for (; gate < (gateOf[point] as number); gate++) along[ray * gateCount + gate] = highest;
      const aboveM = (heightAslM[ray * pointCount + point] as number) - (centreAslM[point] as number);
      if (Number.isNaN(aboveM)) continue;
      const radius = beamRadiusM[point] as number;
      const here = aboveM <= -radius ? 0 : gaussianBlockedFraction(aboveM, radius, "two-way");
      if (!(highest >= here)) highest = here;
    }
    for (; gate < gateCount; gate++) along[ray * gateCount + gate] = highest;
  }
  return along;
}
