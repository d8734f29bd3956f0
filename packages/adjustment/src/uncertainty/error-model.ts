/** What the spread of the error at a place hangs on. NaN stands for "not known" and counts as nothing special. */
export interface ErrorPlace {
  /** The estimated depth, mm. */
  readonly depthMm: number;
  /** To the nearest gauge that the estimate rests on, km. */
  readonly gaugeDistanceKm: number;
  readonly quality: EchoQuality;
}

/** How a place was seen. NaN: not known. */
export interface EchoQuality {
  readonly beamHeightM: number;
  readonly rangeKm: number;
  /** Two-way, by rain and air, dB. */
  readonly lossDb: number;
  /** Shares from 0 to 1: of the beam that terrain takes, of the depth that was screened away, of time bridged. */
  readonly blockedFraction: number;
  readonly screenedFraction: number;
  readonly bridgedFraction: number;
}

/** A gauge and what an estimate made without it says of its place. */
export interface HeldOutResidual extends ErrorPlace {
  readonly xKm: number;
  readonly yKm: number;
  readonly gaugeMm: number;
  /**
   * Variance of the gauge's depth about the depth of its cell, mm²: its own error, and that it is a point. It is
   * taken out of the residuals, so that the model speaks of cells.
   */
  readonly gaugeVarianceMm2: number;
}

/** What a model of the error of depths learned from residuals at gauges. */
export interface ErrorModel {
  /** Of ln((truth + {@link OFFSET_MM}) / (estimate + {@link OFFSET_MM})). */
  readonly medianLogError: number;
  /** Spread at the typical depth and distance, and without anything against the echo. */
  readonly typicalSpread: number;
  readonly typicalDepthMm: number;
  readonly typicalDistanceKm: number;
  /** By which power of the depth the spread falls. */
  readonly depthSlope: number;
  /** Share of the variance that goes with the distance to gauges, 0 to 1. */
  readonly gaugeShare: number;
  /** Multiple of the stated effect of a bad view. */
  readonly qualityEffect: number;
  /** Distance over which errors are alike: the range of an exponential correlation. */
  readonly rangeKm: number;
  /** Spread of what is wrong with all gauges alike, and so with all that rests on them. No residual shows it. */
  readonly gaugesSpread: number;
  /** How many residuals it learned from. */
  readonly residualCount: number;
}

/** What is known before any residual. */
export interface ErrorPrior {
  /** Whether the estimate follows gauges from place to place: then its error grows with the distance to them. */
  readonly followsGauges: boolean;
  /** Where residuals cannot tell {@link ErrorModel.rangeKm}. */
  readonly rangeKm: number;
  /** As in {@link ErrorModel.gaugesSpread}; 0 for none. */
  readonly gaugesSpread: number;
}

/**
 * Added to depths before their ratio is taken, mm: a tip, so that a dry gauge and a dry radar have a ratio too, and
 * rain that the radar missed altogether can lie inside an interval. House rule.
 */
export const OFFSET_MM = 0.2;

/** Standard deviations by which a normal variable reaches its 90 % quantile. */
export const Z90 = 1.2815515655446004;

/** Degrees of freedom of the residuals' distribution: tails heavier than normal, so that a lone one counts less. */
const TAIL_DF = 8;
/** 90 % quantile of Student's t with that many, by which its scale is turned into a normal one of the same p10 and p90. */
const T8_90 = 1.3968153097438645;

/** A value that is expected, and by how much it may differ. All of them house rules. */
interface Expected {
  readonly value: number;
  readonly spread: number;
  readonly low: number;
  readonly high: number;
}

/**
 * Spread 0.3 in logarithms: radar totals of storms, adjusted to gauges, differ from others by some 30 % (Wilson &
 * Brandes 1979, Bulletin of the American Meteorological Society 60, 1048-1058; from memory).
 */
const SPREAD: Expected = { value: Math.log(0.3), spread: 0.8, low: Math.log(0.02), high: Math.log(1.5) };
/** Relative spread falls with depth (Ciach, Krajewski & Villarini 2007, Journal of Hydrometeorology 8, 1325-1347; from memory). */
const DEPTH_SLOPE: Expected = { value: 0.25, spread: 0.12, low: 0, high: 0.6 };
const QUALITY: Expected = { value: 1, spread: 0.5, low: 0, high: 3 };
const SHIFT: Expected = { value: 0, spread: 0.1, low: -0.5, high: 0.5 };
const SHARE_FOLLOWING: Expected = { value: 0.6, spread: 0.2, low: 0, high: 0.9 };
const SHARE_FIXED: Expected = { value: 0.4, spread: 0.2, low: 0, high: 0.9 };
/** Distance within which a gauge still helps, km. House rule. */
const GAUGE_HELP_KM = 40;

/** Sweeps of the search over all unknowns, and golden sections in each. */
const SWEEPS = 10;
const SECTIONS = 18;
const GOLDEN = (Math.sqrt(5) - 1) / 2;

/** Typical values where no residual tells. */
const TYPICAL_DEPTH_MM = 10;
const TYPICAL_DISTANCE_KM = 10;

/** Logarithm by which a bad view widens the error, before it is scaled by what residuals say. House rules. */
export function viewEffect(quality: EchoQuality): number {
  const { beamHeightM, rangeKm, lossDb, blockedFraction, screenedFraction, bridgedFraction } = quality;
  const height = orZero(beamHeightM);
  return (
    0.1 * Math.min(4, height > 0 ? height / 1000 : orZero(rangeKm) / 70) +
    0.03 * Math.min(20, Math.max(0, orZero(lossDb))) +
    0.6 * orZero(blockedFraction) +
    0.5 * orZero(screenedFraction) +
    0.5 * orZero(bridgedFraction)
  );
}

function orZero(value: number): number {
  return Number.isNaN(value) ? 0 : value;
}

/**
 * Learns how the error of an estimate spreads from residuals at gauges that had no part in it.
 *
 * The logarithm of truth over estimate has a median and a spread; the spread is a product of powers: of the depth, of
 * what is against the view, and of how far the gauges are. Five numbers are fitted by the largest posterior density,
 * Student's t about the residuals, normal about what is expected of each number: with no residual at all the
 * expected values stand, with many they hardly count. Never NaN.
 *
 * A residual's variance is that of the estimate plus that of the gauge against its cell (error variance separation:
 * Ciach & Krajewski 1999, Advances in Water Resources 22, 585-595), each with its own value, so that no difference of
 * variances can fall below 0.
 */
export function fitSpread(residuals: readonly HeldOutResidual[], prior: ErrorPrior): ErrorModel {
  const typicalDepthMm = medianOr(
    residuals.map(({ depthMm }) => depthMm),
    TYPICAL_DEPTH_MM,
  );
  const typicalDistanceKm = medianOr(
    residuals.map(({ gaugeDistanceKm }) => gaugeDistanceKm),
    TYPICAL_DISTANCE_KM,
  );
  const expected = [
    SPREAD,
    DEPTH_SLOPE,
    prior.followsGauges ? SHARE_FOLLOWING : SHARE_FIXED,
    QUALITY,
    SHIFT,
  ] as const;
  const modelOf = ([
    spread,
    depthSlope,
    gaugeShare,
    qualityEffect,
    shift,
  ]: readonly number[]): ErrorModel => ({
    medianLogError: shift,
    typicalSpread: Math.exp(spread),
    typicalDepthMm,
    typicalDistanceKm,
    depthSlope,
    gaugeShare,
    qualityEffect,
    rangeKm: prior.rangeKm,
    gaugesSpread: prior.gaugesSpread,
    residualCount: residuals.length,
  });
  const unlikelihood = (values: readonly number[]): number => {
    const model = modelOf(values);
    let sum = 0;
    for (const [k, { value, spread }] of expected.entries()) sum += 0.5 * ((values[k] - value) / spread) ** 2;
    for (const residual of residuals) {
      const variance = ownSpread(model, residual) ** 2 + gaugeLogVariance(residual);
      const standardised = (logError(residual) - model.medianLogError) ** 2 / variance;
      sum += 0.5 * Math.log(variance) + 0.5 * (TAIL_DF + 1) * Math.log(1 + standardised / TAIL_DF);
    }
    return sum;
  };
  const values = expected.map(({ value }) => value);
  for (let sweep = 0; sweep < SWEEPS; sweep++) {
    for (const [k, { low, high }] of expected.entries()) {
      // The whole range at first, then ever closer about what was found.
      const half = (high - low) / (sweep === 0 ? 1 : sweep);
      values[k] = leastBetween(Math.max(low, values[k] - half), Math.min(high, values[k] + half), (value) => {
        const before = values[k];
        values[k] = value;
        const cost = unlikelihood(values);
        values[k] = before;
        return cost;
      });
    }
  }
  const fitted = modelOf(values);
  return { ...fitted, typicalSpread: (fitted.typicalSpread * T8_90) / Z90 };
}

/** ln((gauge + offset) / (estimate + offset)). */
export function logError({ gaugeMm, depthMm }: Pick<HeldOutResidual, "gaugeMm" | "depthMm">): number {
  return Math.log((gaugeMm + OFFSET_MM) / (depthMm + OFFSET_MM));
}

/** Variance of a gauge about its cell, in logarithms. */
export function gaugeLogVariance({
  gaugeMm,
  depthMm,
  gaugeVarianceMm2,
}: Pick<HeldOutResidual, "gaugeMm" | "depthMm" | "gaugeVarianceMm2">): number {
  return gaugeVarianceMm2 / (Math.max(gaugeMm, depthMm) + OFFSET_MM) ** 2;
}

/** Spread (standard deviation) of the logarithm of truth over estimate at a place, all in all. */
export function logSpread(model: ErrorModel, place: ErrorPlace): number {
  return Math.hypot(ownSpread(model, place), model.gaugesSpread);
}

/** The same without what is wrong with all gauges alike: what residuals show. */
export function ownSpread(model: ErrorModel, { depthMm, gaugeDistanceKm, quality }: ErrorPlace): number {
  const depth = (depthMm + OFFSET_MM) / (model.typicalDepthMm + OFFSET_MM);
  const near = gaugeLack(gaugeDistanceKm) / gaugeLack(model.typicalDistanceKm);
  const variance = 1 - model.gaugeShare + model.gaugeShare * near;
  return (
    model.typicalSpread *
    depth ** -model.depthSlope *
    Math.sqrt(variance) *
    Math.exp(model.qualityEffect * viewEffect(quality))
  );
}

/**
 * Share of the variance of an exponentially correlated field that one value at a distance leaves unknown: the
 * variance of simple kriging from it, 1 - exp(-2 d / range).
 */
function gaugeLack(distanceKm: number): number {
  return Number.isNaN(distanceKm) ? 1 : Math.max(1e-3, 1 - Math.exp((-2 * distanceKm) / GAUGE_HELP_KM));
}

function leastBetween(low: number, high: number, cost: (value: number) => number): number {
  let from = low;
  let to = high;
  let a = to - GOLDEN * (to - from);
  let b = from + GOLDEN * (to - from);
  let costA = cost(a);
  let costB = cost(b);
  for (let k = 0; k < SECTIONS; k++) {
    if (costA <= costB) {
      to = b;
      [b, costB] = [a, costA];
      a = to - GOLDEN * (to - from);
      costA = cost(a);
    } else {
      from = a;
      [a, costA] = [b, costB];
      b = from + GOLDEN * (to - from);
      costB = cost(b);
    }
  }
  return (from + to) / 2;
}

function medianOr(values: readonly number[], otherwise: number): number {
  const known = values.filter(Number.isFinite).toSorted((a, b) => a - b);
  if (known.length === 0) return otherwise;
  return (known[(known.length - 1) >> 1] + known[known.length >> 1]) / 2;
}
