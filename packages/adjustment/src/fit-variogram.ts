import type { VariogramBin } from "./sample-variogram.ts";
import { correlation, type VariogramModel, type VariogramShape } from "./variogram-model.ts";

/** What a bin counts for: its pairs, its pairs over the square of its distance, or the same for all. */
export type BinWeight = "pairs" | "pairs over distance squared" | "equal";

export interface FitOptions {
  readonly shape: VariogramShape;
  readonly weight: BinWeight;
  /** Smallest and largest range that is tried, km. */
  readonly rangeLimitsKm: readonly [low: number, high: number];
  /** True keeps the nugget at 0. */
  readonly withoutNugget?: boolean;
}

/** How many ranges are tried before the best is refined; log-spaced. */
const TRIED_RANGES = 60;
const GOLDEN = (Math.sqrt(5) - 1) / 2;
const REFINEMENTS = 60;

/**
 * Fits a variogram model to bins by direct minimisation of the weighted sum of squares.
 *
 * With the range fixed the fit of nugget and sill is linear and exact; a negative nugget is set to 0 and the
 * sill fitted again, a negative sill likewise. The range is searched between its limits: log-spaced trials,
 * then golden sections about the best.
 *
 * @returns undefined where no bin tells anything: no bins, or all of them 0
 */
export function fitVariogram(bins: readonly VariogramBin[], options: FitOptions): VariogramModel | undefined {
  if (!bins.some((bin) => bin.semivariance > 0)) return undefined;
  const [low, high] = options.rangeLimitsKm;
  const at = (logRange: number) => fitAtRange(bins, Math.exp(logRange), options);
  const step = Math.log(high / low) / (TRIED_RANGES - 1);
  let best = Math.log(low);
  let least = at(best).cost;
  for (let trial = 1; trial < TRIED_RANGES; trial++) {
    const logRange = Math.log(low) + trial * step;
    const { cost } = at(logRange);
    if (cost < least) {
      least = cost;
      best = logRange;
    }
  }
  let from = Math.max(Math.log(low), best - step);
  let to = Math.min(Math.log(high), best + step);
  for (let k = 0; k < REFINEMENTS && to > from; k++) {
    const a = to - GOLDEN * (to - from);
    const b = from + GOLDEN * (to - from);
    if (at(a).cost <= at(b).cost) to = b;
    else from = a;
  }
  return at((from + to) / 2).model;
}

/** Nugget and sill at one range, and what the fit leaves. */
export function fitAtRange(
  bins: readonly VariogramBin[],
  rangeKm: number,
  { shape, weight, withoutNugget = false }: Omit<FitOptions, "rangeLimitsKm">,
): { readonly model: VariogramModel; readonly cost: number } {
  let sw = 0;
  let sf = 0;
  let sff = 0;
  let sg = 0;
  let sfg = 0;
  let sgg = 0;
  for (const { pairCount, distanceKm, semivariance } of bins) {
    const w = weightOf(weight, pairCount, distanceKm);
    const f = 1 - correlation(shape, distanceKm / rangeKm);
    sw += w;
    sf += w * f;
    sff += w * f * f;
    sg += w * semivariance;
    sfg += w * f * semivariance;
    sgg += w * semivariance * semivariance;
  }
  const determinant = sw * sff - sf * sf;
  let nugget = 0;
  let partialSill = sff > 0 ? sfg / sff : 0;
  if (!withoutNugget && determinant > 1e-12 * sw * sff) {
    const free = (sff * sg - sf * sfg) / determinant;
    if (free > 0) {
      nugget = free;
      partialSill = (sw * sfg - sf * sg) / determinant;
    }
    if (partialSill < 0) {
      partialSill = 0;
      nugget = sg / sw;
    }
  }
  const cost =
    sgg -
    2 * (nugget * sg + partialSill * sfg) +
    nugget * nugget * sw +
    2 * nugget * partialSill * sf +
    partialSill * partialSill * sff;
  return { model: { shape, nugget, partialSill, rangeKm }, cost };
}

function weightOf(weight: BinWeight, pairCount: number, distanceKm: number): number {
  if (weight === "equal") return 1;
  if (weight === "pairs") return pairCount;
  return pairCount / (distanceKm * distanceKm);
}
