import type { CorrelationMean } from "./correlation-sums.ts";
import { type LayerHeights, type LayerShares, layerShares } from "./vertical-profile.ts";

/** RHOHV = inRain + perKm * range - drop * share of the beam in the layer, fitted to means. */
export interface CorrelationFit {
  readonly inRain: number;
  readonly perKm: number;
  readonly drop: number;
  readonly chi2: number;
}

/** Share of a beam below the layer that counts as rain alone, and share in it that shows the layer. */
const RAIN_ALONE = 0.9;
const SHOWS_LAYER = 0.3;
/** Places of each kind that a fit needs; house rule. */
const ENOUGH = 2;

/**
 * Weighted least squares of RHOHV on the share of the beam that a layer takes; farther echo may correlate less anyway.
 *
 * @returns undefined where no beam is in rain alone or none shows the layer, so that the fit would mean nothing
 */
export function fitCorrelation(
  means: readonly CorrelationMean[],
  layer: LayerHeights,
): CorrelationFit | undefined {
  const shares = means.map(({ centreM, sigmaM }) => layerShares(layer, centreM, sigmaM));
  if (!seesLayer(shares)) return undefined;
  return solve(
    means,
    shares.map(({ melting }) => melting),
  );
}

/** Whether some beams are in rain alone and some show the layer, so that a fit means anything. */
export function seesLayer(shares: readonly LayerShares[]): boolean {
  const inRain = shares.filter(({ rain }) => rain >= RAIN_ALONE).length;
  const inLayer = shares.filter(({ melting }) => melting >= SHOWS_LAYER).length;
  return inRain >= ENOUGH && inLayer >= ENOUGH;
}

/** Chi-square that is left where no layer is assumed: a line over range. */
export function correlationWithoutLayer(means: readonly CorrelationMean[]): number {
  return means.length === 0 ? 0 : (solve(means, undefined)?.chi2 ?? 0);
}

/** Normal equations about the weighted means, so that two unknowns remain. */
function solve(
  means: readonly CorrelationMean[],
  shares: readonly number[] | undefined,
): CorrelationFit | undefined {
  let [w, wx, ws, wy] = [0, 0, 0, 0];
  means.forEach(({ rangeM, rhohv, error }, i) => {
    const weight = 1 / (error * error);
    w += weight;
    wx += (weight * rangeM) / 1000;
    ws += weight * (shares?.[i] ?? 0);
    wy += weight * rhohv;
  });
  const [meanX, meanS, meanY] = [wx / w, ws / w, wy / w];
  let [xx, xs, ss, xy, sy, yy] = [0, 0, 0, 0, 0, 0];
  means.forEach(({ rangeM, rhohv, error }, i) => {
    const weight = 1 / (error * error);
    const [x, s, y] = [rangeM / 1000 - meanX, (shares?.[i] ?? 0) - meanS, rhohv - meanY];
    xx += weight * x * x;
    xs += weight * x * s;
    ss += weight * s * s;
    xy += weight * x * y;
    sy += weight * s * y;
    yy += weight * y * y;
  });
  const determinant = xx * ss - xs * xs;
  const alone = shares === undefined || determinant <= 1e-9 * xx * ss;
  if (alone && shares !== undefined) return undefined;
  const perKm = alone ? xy / xx : (xy * ss - sy * xs) / determinant;
  const onShare = alone ? 0 : (sy * xx - xy * xs) / determinant;
  return {
    inRain: meanY - perKm * meanX - onShare * meanS,
    perKm,
    drop: -onShare,
    chi2: yy - perKm * xy - onShare * sy,
  };
}
