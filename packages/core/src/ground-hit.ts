import { beamAboveArc } from "./beam.ts";

/** Terrain along one azimuth. */
export interface TerrainProfile {
  /** Distance between two points along the ground; the first point lies one such step from the antenna. */
  readonly stepM: number;
  /** Shape [points]: height above mean sea level; NaN where it is not known. */
  readonly heightAslM: Float32Array | Float64Array;
}

/** Where the centre of a beam first meets the ground. */
export interface GroundHit {
  readonly arcM: number;
  readonly slantRangeM: number;
  readonly heightAslM: number;
}

/**
 * First place where terrain reaches the centre of the beam, on straight lines between the points.
 *
 * Points that are not known hide nothing. For shares of the beam instead of its centre see
 * `uniformBlockedFraction`.
 *
 * @param antennaHeightM - above mean sea level
 * @param radiusM - from `effectiveRadiusM`
 * @returns undefined where the beam passes over all known terrain
 */
export function groundHit(
  terrain: TerrainProfile,
  antennaHeightM: number,
  elevationDeg: number,
  radiusM: number,
): GroundHit | undefined {
  let beforeAboveM = Number.NaN;
  for (let k = 0; k < terrain.heightAslM.length; k++) {
    const arcM = (k + 1) * terrain.stepM;
    const beam = antennaHeightM + beamAboveArc(arcM, elevationDeg, radiusM).heightM;
    const aboveM = (terrain.heightAslM[k] as number) - beam;
    if (aboveM >= 0) {
      const back = beforeAboveM < 0 ? aboveM / (aboveM - beforeAboveM) : 0;
      const hitM = arcM - back * terrain.stepM;
      const place = beamAboveArc(hitM, elevationDeg, radiusM);
      return {
        arcM: hitM,
        slantRangeM: place.slantRangeM,
        heightAslM: antennaHeightM + place.heightM,
      };
    }
    beforeAboveM = aboveM;
  }
  return undefined;
}
