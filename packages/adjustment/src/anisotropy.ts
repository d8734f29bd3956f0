import { fitAtRange } from "./fit-variogram.ts";
import type { Places, VariogramBin } from "./sample-variogram.ts";
import { type Anisotropy, modelDistanceKm, type VariogramShape } from "./variogram-model.ts";

/** Directions and distances that pairs are sorted by. House rules. */
const DIRECTIONS = 12;
const DISTANCES = 12;
/** What is tried: long axes at these steps, and ranges across over ranges along. */
const AZIMUTH_STEP_DEG = 15;
const RATIOS = [0.8, 0.65, 0.5, 0.4, 0.3];
const TRIED_RANGES = 30;
/** A bin of fewer pairs says nothing. Common practice. */
const LEAST_PAIRS = 30;
/** An ellipse counts where it leaves at most this share of what a circle leaves unexplained. House rule. */
const SIGNIFICANT_SHARE = 0.6;

/** A bin of a directional sample variogram. */
interface DirectionalBin extends VariogramBin {
  /** Mean direction of its pairs as a vector, km east and north. */
  readonly eastKm: number;
  readonly northKm: number;
}

/**
 * Whether values at places keep together longer along one direction than across it, from their directional sample
 * variogram (Journel & Huijbregts 1978, Mining Geostatistics, ch. III): the ellipse of distances under which one model
 * fits all directions best. A radar field has cells enough for that and a network of gauges has not, so kriging of
 * gauges takes its ellipse from there (as Velasco-Forero et al. 2009, Advances in Water Resources 32, 986-1002, do
 * from the field's correlogram).
 *
 * @param cutoffKm - pairs farther apart are not used
 * @returns undefined where a circle does nearly as well
 */
export function anisotropyOf(
  places: Places,
  values: ArrayLike<number>,
  shape: VariogramShape,
  cutoffKm: number,
): Anisotropy | undefined {
  const bins = directionalBins(places, values, cutoffKm);
  if (!bins.some(({ semivariance }) => semivariance > 0)) return undefined;
  const round = leastCost(bins, { azimuthDeg: 0, ratio: 1 }, shape, cutoffKm);
  let best: Anisotropy | undefined;
  let least = SIGNIFICANT_SHARE * round;
  for (let azimuthDeg = 0; azimuthDeg < 180; azimuthDeg += AZIMUTH_STEP_DEG) {
    for (const ratio of RATIOS) {
      const cost = leastCost(bins, { azimuthDeg, ratio }, shape, cutoffKm);
      if (cost < least) {
        least = cost;
        best = { azimuthDeg, ratio };
      }
    }
  }
  return best;
}

/** Places in the model's own measure: turned to its long axis, and stretched across it. */
export function stretched(places: Places, anisotropy: Anisotropy | undefined): Places {
  if (anisotropy === undefined) return places;
  const azimuth = (anisotropy.azimuthDeg * Math.PI) / 180;
  const { xKm, yKm } = places;
  return {
    xKm: Float64Array.from(xKm, (x, i) => x * Math.sin(azimuth) + yKm[i] * Math.cos(azimuth)),
    yKm: Float64Array.from(
      xKm,
      (x, i) => (x * Math.cos(azimuth) - yKm[i] * Math.sin(azimuth)) / anisotropy.ratio,
    ),
  };
}

function directionalBins(
  { xKm, yKm }: Places,
  values: ArrayLike<number>,
  cutoffKm: number,
): DirectionalBin[] {
  const size = DIRECTIONS * DISTANCES;
  const sums = {
    count: new Float64Array(size),
    distance: new Float64Array(size),
    east: new Float64Array(size),
    north: new Float64Array(size),
    squares: new Float64Array(size),
  };
  for (let i = 0; i < values.length; i++) {
    for (let j = 0; j < i; j++) {
      let east = xKm[i] - xKm[j];
      let north = yKm[i] - yKm[j];
      const distance = Math.sqrt(east * east + north * north);
      if (distance > cutoffKm || distance === 0) continue;
      // A pair has no head: directions run over half a turn.
      if (north < 0 || (north === 0 && east < 0)) {
        east = -east;
        north = -north;
      }
      const turn = Math.atan2(north, east) / Math.PI;
      const direction = Math.min(DIRECTIONS - 1, Math.floor(turn * DIRECTIONS));
      const ring = Math.min(DISTANCES - 1, Math.floor((distance / cutoffKm) * DISTANCES));
      const bin = direction * DISTANCES + ring;
      sums.count[bin]++;
      sums.distance[bin] += distance;
      sums.east[bin] += east;
      sums.north[bin] += north;
      sums.squares[bin] += (values[i] - values[j]) ** 2;
    }
  }
  return Array.from({ length: size }, (_, bin): DirectionalBin => {
    const n = sums.count[bin];
    return {
      pairCount: n,
      distanceKm: sums.distance[bin] / n,
      eastKm: sums.east[bin] / n,
      northKm: sums.north[bin] / n,
      semivariance: sums.squares[bin] / n / 2,
    };
  }).filter(({ pairCount }) => pairCount >= LEAST_PAIRS);
}

/** What the best model leaves of the bins when distances are measured by an ellipse. */
function leastCost(
  bins: readonly DirectionalBin[],
  anisotropy: Anisotropy,
  shape: VariogramShape,
  cutoffKm: number,
): number {
  const model = { shape, nugget: 0, partialSill: 1, rangeKm: 1, anisotropy };
  // Weights stay those of true distances, so that ellipses are compared on the same terms.
  const measured = bins.map((bin) => ({
    pairCount: bin.pairCount / (bin.distanceKm * bin.distanceKm),
    distanceKm: modelDistanceKm(model, bin.eastKm, bin.northKm),
    semivariance: bin.semivariance,
  }));
  let least = Number.POSITIVE_INFINITY;
  for (let k = 0; k < TRIED_RANGES; k++) {
    const rangeKm = (cutoffKm / DISTANCES) * (3 * DISTANCES) ** (k / (TRIED_RANGES - 1));
    least = Math.min(least, fitAtRange(measured, rangeKm, { shape, weight: "pairs" }).cost);
  }
  return least;
}
