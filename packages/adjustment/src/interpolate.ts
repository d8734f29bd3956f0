import { stretched } from "./anisotropy.ts";
import { fitVariogram } from "./fit-variogram.ts";
import { inverseDistance } from "./inverse-distance.ts";
import { krigingSystem } from "./kriging.ts";
import { localKriging } from "./local-kriging.ts";
import { type Places, sampleVariogram } from "./sample-variogram.ts";
import type { Anisotropy, VariogramModel, VariogramShape } from "./variogram-model.ts";

/** Fewer places than this tell too little of a variogram: that of the radar field stands in. House rule. */
export const OWN_VARIOGRAM_FROM = 8;
/** More places than this are kriged from the nearest alone. */
const LOCAL_FROM = 100;
/** Bins of a sample variogram: one for so many pairs, within these limits. Common practice. */
const PAIRS_PER_BIN = 10;
const BIN_LIMITS = [4, 12] as const;
/** Share of the longest distance up to which pairs are used. Common practice. */
export const CUTOFF_SHARE = 0.5;

/** A value anywhere in the plane. */
export type Interpolant = (xKm: number, yKm: number) => number;

/** What interpolation may lean on. */
export interface VariogramSettings {
  readonly shape: VariogramShape;
  /** Of the radar field, with a sill of 1; undefined where the field tells nothing. */
  readonly radarVariogram: VariogramModel | undefined;
}

/**
 * The variogram of values at places: fitted to them where there are enough, else that of the radar field
 * scaled to their variance. Where the radar field keeps together longer along one direction, so do the values.
 *
 * The fit weights a bin by its pairs over the square of its distance, which is practice and not theory; the
 * range lies between the first bin and the longest distance.
 *
 * @returns undefined where values do not vary or nothing tells how
 */
export function variogramOf(
  places: Places,
  values: ArrayLike<number>,
  { shape, radarVariogram }: VariogramSettings,
): VariogramModel | undefined {
  const n = values.length;
  if (n < OWN_VARIOGRAM_FROM) {
    if (radarVariogram === undefined) return undefined;
    const mean = Array.from(values).reduce((sum, value) => sum + value, 0) / n;
    const squares = Array.from(values).reduce((sum, value) => sum + (value - mean) ** 2, 0);
    if (!(squares > 0)) return undefined;
    const variance = squares / (n - 1);
    return {
      ...radarVariogram,
      nugget: radarVariogram.nugget * variance,
      partialSill: radarVariogram.partialSill * variance,
    };
  }
  return fitted(places, values, shape, radarVariogram?.anisotropy);
}

/**
 * A variogram fitted to the values themselves; undefined where they do not vary.
 *
 * @param anisotropy - by which distances are measured
 */
export function fitted(
  at: Places,
  values: ArrayLike<number>,
  shape: VariogramShape,
  anisotropy?: Anisotropy,
): VariogramModel | undefined {
  const places = stretched(at, anisotropy);
  const longestKm = longestDistanceKm(places);
  if (!(longestKm > 0)) return undefined;
  const pairCount = (values.length * (values.length - 1)) / 2;
  const [fewest, most] = BIN_LIMITS;
  const binCount = Math.min(most, Math.max(fewest, Math.floor(pairCount / PAIRS_PER_BIN)));
  const cutoffKm = CUTOFF_SHARE * longestKm;
  const bins = sampleVariogram(places, values, { binKm: cutoffKm / binCount, cutoffKm });
  const nearest = bins[0]?.distanceKm;
  if (nearest === undefined) return undefined;
  const model = fitVariogram(bins, {
    shape,
    weight: "pairs over distance squared",
    rangeLimitsKm: [nearest, longestKm],
  });
  return model === undefined || anisotropy === undefined ? model : { ...model, anisotropy };
}

export function longestDistanceKm({ xKm, yKm }: Places): number {
  let longest = 0;
  for (let i = 0; i < xKm.length; i++)
    for (let j = 0; j < i; j++) {
      const dx = xKm[i] - xKm[j];
      const dy = yKm[i] - yKm[j];
      longest = Math.max(longest, dx * dx + dy * dy);
    }
  return Math.sqrt(longest);
}

/**
 * Ordinary kriging of values at places, with the nugget and the errors of the values taken for error, so
 * that the field is smooth. More than a hundred places are kriged from the nearest alone.
 *
 * Where there is no variogram, or the system is singular, inverse distances stand in, and a note says so.
 */
export function krigedOr(
  places: Places,
  values: ArrayLike<number>,
  errorVariance: ArrayLike<number>,
  model: VariogramModel | undefined,
  note: (text: string) => void,
): Interpolant {
  if (model !== undefined) {
    const { field, errors } = nuggetAsError(model, errorVariance);
    const input = { places, values, model: field, errorVariance: errors };
    if (values.length > LOCAL_FROM) {
      const local = localKriging(input);
      if (local !== "singular") return local.value;
    } else {
      const system = krigingSystem(input);
      if (typeof system !== "string") return (x, y) => system.value(x, y);
    }
  }
  note("no variogram to krige with: inverse distances in its place");
  return (x, y) => inverseDistance(places, values, 2, x, y);
}

/** A model without its nugget, and error variances that are never below it. */
export function nuggetAsError(
  model: VariogramModel,
  errorVariance: ArrayLike<number>,
): { readonly field: VariogramModel; readonly errors: Float64Array } {
  return {
    field: { ...model, nugget: 0 },
    errors: Float64Array.from(errorVariance, (variance) => Math.max(variance, model.nugget)),
  };
}
