import { airAbove, REFERENCE_SURFACE, type SurfaceAir } from "./atmosphere.ts";
import { beamHeightM } from "./beam.ts";
import { gasAttenuationOneWay } from "./gas-attenuation.ts";

/** Longest piece of a ray that is taken for a parabola. */
const PIECE_M = 1000;

/**
 * Loss by gases along a beam that climbs out of the moist layer, dB BOTH ways.
 *
 * Source: ITU-R P.676-13 line by line at each height of the atmosphere of ITU-R P.835 (see `airAbove`), summed
 * by Simpson's rule. Many data sets are corrected for gases already: then this loss is in them.
 *
 * @param rangesM - slant ranges, ascending, 0 or more
 * @param elevationDeg - -2 to 90
 * @param radiusM - from `effectiveRadiusM`
 * @returns shape [ranges]
 * @throws RangeError where the frequency lies outside 1 to 1000 GHz or the ranges do not ascend
 */
export function gasLossTwoWayDb(
  rangesM: readonly number[],
  frequencyGHz: number,
  elevationDeg: number,
  radiusM: number,
  surface: SurfaceAir = REFERENCE_SURFACE,
): Float64Array {
  const lossDb = new Float64Array(rangesM.length);
  const specific = (rangeM: number) =>
    gasAttenuationOneWay(frequencyGHz, airAbove(beamHeightM(rangeM, elevationDeg, radiusM), surface))
      .totalDbPerKm;
  let reachedM = 0;
  let sum = 0;
  let here = specific(0);
  rangesM.forEach((rangeM, k) => {
    if (!(rangeM >= reachedM)) throw new RangeError("ranges of a loss must ascend from 0");
    const pieces = Math.ceil((rangeM - reachedM) / PIECE_M);
    const lengthM = pieces === 0 ? 0 : (rangeM - reachedM) / pieces;
    for (let piece = 0; piece < pieces; piece++) {
      const fromM = reachedM + piece * lengthM;
      const next = specific(fromM + lengthM);
      sum += ((2 * lengthM) / 6000) * (here + 4 * specific(fromM + lengthM / 2) + next);
      here = next;
    }
    reachedM = rangeM;
    lossDb[k] = sum;
  });
  return lossDb;
}
