import { percentile } from "../percentile.ts";
import { NO_LAW, type PowerLaw, type ZrPairs } from "./zr-pairs.ts";

/** A reflectivity and the rain rate that is as seldom exceeded. */
export interface MatchedValue {
  readonly dbz: number;
  readonly rateMmPerHour: number;
}

/**
 * Reflectivities and rates of equal cumulative probability: pairs by rank where there are as many of one as of the
 * other, type 7 quantiles at given probabilities otherwise.
 *
 * The two samples need not be of the same moments. It matches samples that have nothing to do with each other just
 * as well, so the correlation must be told beside it.
 *
 * Source: Calheiros and Zawadzki (1987), Journal of Climate and Applied Meteorology 26, 118-132.
 *
 * @param dbz - dBZ in any order, -Infinity below detection
 * @param rateMmPerHour - mm/h in any order
 * @param probabilities - ascending, 0 to 1; may be left out where the samples are of one size
 * @returns ascending
 * @throws RangeError where probabilities are left out and the sizes differ
 */
export function matchProbabilities(
  dbz: ArrayLike<number>,
  rateMmPerHour: ArrayLike<number>,
  probabilities?: readonly number[],
): MatchedValue[] {
  const reflectivities = Float64Array.from(dbz).sort();
  const rates = Float64Array.from(rateMmPerHour).sort();
  if (probabilities !== undefined) {
    return probabilities.map((p) => ({
      dbz: percentile(reflectivities, p),
      rateMmPerHour: percentile(rates, p),
    }));
  }
  if (reflectivities.length !== rates.length)
    throw new RangeError("samples of unequal size need probabilities");
  return Array.from(rates, (rate, i) => ({ dbz: reflectivities[i], rateMmPerHour: rate }));
}

/** Reflectivity below which it counts as dry, so that radar and gauge are dry equally often: the type 7 quantile. */
export function dryThresholdDbz(dbz: ArrayLike<number>, shareDry: number): number {
  return percentile(Float64Array.from(dbz).sort(), shareDry);
}

/**
 * Rain rate of a reflectivity by matched values: linear in dBZ between them, held at both ends.
 *
 * @param matched - ascending, at least one
 */
export function matchedRate(matched: readonly MatchedValue[], dbz: number): number {
  const above = matched.findIndex((value) => value.dbz >= dbz);
  if (above < 0) return matched[matched.length - 1].rateMmPerHour;
  if (above === 0) return matched[0].rateMmPerHour;
  const [low, high] = [matched[above - 1], matched[above]];
  const part = (dbz - low.dbz) / (high.dbz - low.dbz);
  return low.rateMmPerHour + part * (high.rateMmPerHour - low.rateMmPerHour);
}

/** The values of two samples in descending order, sorted once for any number of resamples. */
interface Orders {
  readonly byDbz: Uint32Array;
  readonly byRate: Uint32Array;
}

/**
 * A power law through matched ranks, as a function of how often each pair occurs.
 *
 * The gauges' dry share is matched first: with W the weight of the rates that reach the least one, the W heaviest
 * reflectivities are matched to them rank by rank. The law is the reduced major axis of the matched logarithms,
 * which for two log-normal samples is the ratio of their spreads.
 *
 * @param leastRateMmPerHour - above 0; what is below counts as dry
 */
export function matchedLaw(
  { dbz, rateMmPerHour }: ZrPairs,
  leastRateMmPerHour: number,
): (weights: ArrayLike<number>) => PowerLaw {
  const order = (values: Float64Array) =>
    Uint32Array.from(values.keys()).sort((a, b) => values[b] - values[a]);
  const orders: Orders = { byDbz: order(dbz), byRate: order(rateMmPerHour) };
  const logR = rateMmPerHour.map((rate) => Math.log10(rate));
  return (weights) => {
    const sums = { w: 0, x: 0, y: 0, xx: 0, yy: 0 };
    let z = 0;
    let leftOfZ = orders.byDbz.length > 0 ? weights[orders.byDbz[0]] : 0;
    for (const r of orders.byRate) {
      if (!(rateMmPerHour[r] >= leastRateMmPerHour)) break;
      let left = weights[r];
      while (left > 0) {
        while (leftOfZ === 0) leftOfZ = weights[orders.byDbz[++z]];
        const part = Math.min(left, leftOfZ);
        const y = dbz[orders.byDbz[z]] / 10;
        // A gauge that is wet oftener than the radar: there is nothing to match its lightest rain to.
        if (y > Number.NEGATIVE_INFINITY) addTo(sums, part, logR[r], y);
        left -= part;
        leftOfZ -= part;
      }
    }
    return lawOf(sums);
  };
}

interface Sums {
  w: number;
  x: number;
  y: number;
  xx: number;
  yy: number;
}

function addTo(sums: Sums, weight: number, x: number, y: number): void {
  sums.w += weight;
  sums.x += weight * x;
  sums.y += weight * y;
  sums.xx += weight * x * x;
  sums.yy += weight * y * y;
}

function lawOf({ w, x, y, xx, yy }: Sums): PowerLaw {
  const spreadX = xx / w - (x / w) ** 2;
  const spreadY = yy / w - (y / w) ** 2;
  // What rounding leaves of a sample of one value.
  if (!(spreadX > 1e-12 && spreadY > 1e-12)) return NO_LAW;
  const b = Math.sqrt(spreadY / spreadX);
  return { a: 10 ** (y / w - (b * x) / w), b };
}
