import type { Interval } from "@rainreckon/core";
import { bayesianLogFactor } from "./bayesian-kriging.ts";
import {
  type Interpolant,
  krigedOr,
  nuggetAsError,
  type VariogramSettings,
  variogramOf,
} from "./interpolate.ts";
import { inverseDistance } from "./inverse-distance.ts";
import { kalmanBias } from "./kalman-bias.ts";
import { krigingSystem } from "./kriging.ts";
import { type IntervalDepth, overIntervals } from "./over-intervals.ts";
import { rangeFactor, rangePolynomial } from "./range-factor.ts";
import { splitMismatch } from "./residuals.ts";
import { lengthFromSpacing, twoPassFactor } from "./two-pass-factor.ts";
import { type GaugePlace, mergeCoincident, type WindowGauge } from "./window-gauges.ts";

/** Ways to adjust, the simpler first: where two do as well, the one that stands first is taken. */
export const METHOD_NAMES = [
  "none",
  "mean-field-bias",
  "log-mean-bias",
  "kalman-bias",
  "range-dependent",
  "gauges-alone",
  "idw-additive",
  "idw-multiplicative",
  "idw-mixed",
  "brandes",
  "kriging-additive",
  "kriging-multiplicative",
  "kriging-mixed",
  "conditional-merging",
  "kriging-external-drift",
  "kriging-bayesian",
  "combined",
] as const;
export type MethodName = (typeof METHOD_NAMES)[number];

/** What people read. */
export const METHOD_TITLES: Readonly<Record<MethodName, string>> = {
  none: "no adjustment",
  "mean-field-bias": "mean-field bias",
  "log-mean-bias": "mean-field bias from the mean log ratio",
  "kalman-bias": "mean-field bias in time, Kalman filter",
  "range-dependent": "range-dependent factor",
  "gauges-alone": "gauges alone, ordinary kriging",
  "idw-additive": "inverse distances, additive residuals",
  "idw-multiplicative": "inverse distances, multiplicative residuals",
  "idw-mixed": "inverse distances, mixed residuals",
  brandes: "factors spread after Brandes (1975)",
  "kriging-additive": "kriging of additive residuals",
  "kriging-multiplicative": "kriging of multiplicative residuals",
  "kriging-mixed": "kriging of mixed residuals",
  "conditional-merging": "conditional merging",
  "kriging-external-drift": "kriging with external drift",
  "kriging-bayesian": "Bayesian kriging of log factors",
  combined: "mean of Brandes' factors and Bayesian kriging",
};

export interface MethodSettings extends VariogramSettings {
  /** Factors gauge/radar are held between these. */
  readonly factorLimits: readonly [low: number, high: number];
  /** Depth from which gauge and radar make a ratio, mm. */
  readonly thresholdMm: number;
  /** Error of a gauge's depth, as a share of it. */
  readonly gaugeErrorShare: number;
  /** The window, and the intervals that pairs are made over: the clock of the Kalman filter. */
  readonly window: Interval;
  readonly pairIntervalMs: number;
  /** Whether fields are learned once for the window, or anew for each interval that pairs are made over. */
  readonly over?: "window" | "intervals";
  readonly kalman: { readonly memory: number; readonly variance: number; readonly pairVariance: number };
}

/** A method after it has learned from gauges. */
export type LearnedMethod = { readonly notes: readonly string[] } & (
  | {
      readonly kind: "factor";
      /** The factor at an instant, the same everywhere. */
      readonly factorAt: (epochMs: number) => number;
      /** True where it is the same at all times. */
      readonly constant: boolean;
    }
  | {
      readonly kind: "field";
      /** Whether a place's range from its radar matters; where it does not, NaN does no harm. */
      readonly usesRange: boolean;
      /** Depth of the window at a place, mm, never negative; NaN where the radar's is NaN. */
      readonly depthMm: (xKm: number, yKm: number, radarMm: number, rangeKm: number) => number;
      /** Where intervals are learned by themselves: the depth of one of them; undefined where the window speaks for it. */
      readonly ofInterval?: (span: Interval) => IntervalDepth | undefined;
    }
);

/** Places needed by a range polynomial, by a drift, and to weigh variograms. House rules. */
const RANGE_FROM = 8;
const DRIFT_FROM = 8;
const BAYESIAN_FROM = 5;
/** What `combined` is the mean of: one spreads factors by distance alone, the other by what the gauges say of them. */
export const COMBINED = ["brandes", "kriging-bayesian"] as const;
/** Smallest error of a gauge's depth, mm: half a tip of 0.2 mm. House rule. */
const LEAST_ERROR_MM = 0.1;
/** Radar depth at which a mismatch turns from absolute to relative, mm. House rule. */
const TURN_MM = 1;
const CONVERGENCE = 0.3;

/**
 * Lets a method learn from gauges.
 *
 * Where a method has too few gauges to stand on, or they cannot tell what it asks, a simpler one stands in
 * and the notes say so: there is always a figure, and never NaN for a numerical reason. Methods that
 * interpolate use complete gauges only, those in one place as one. Only where the radar saw no rain at any
 * of the gauges is a factor NaN: there is nothing to multiply.
 *
 * @param gauges - trusted gauges whose sums pass the floors of `meanFieldBias`
 */
export function learnMethod(
  name: MethodName,
  gauges: readonly WindowGauge[],
  settings: MethodSettings,
): LearnedMethod {
  if (settings.over === "intervals") {
    return overIntervals(gauges, settings.window, settings.pairIntervalMs, (some) =>
      learnMethod(name, some, { ...settings, over: "window" }),
    );
  }
  const notes: string[] = [];
  const instead = (reason: string): LearnedMethod => ({
    ...constantFactor(ratioOfSums(gauges, settings)),
    notes: [...notes, `${reason}: mean-field bias in its place`],
  });
  const places = mergeCoincident(gauges.filter((gauge) => gauge.complete));
  const field = (
    depth: (x: number, y: number, radarMm: number, rangeKm: number) => number,
  ): LearnedMethod => ({
    kind: "field",
    notes,
    usesRange: name === "range-dependent",
    // Clipped after prediction: an additive part or a drift may ask for less than nothing.
    depthMm: (x, y, radarMm, rangeKm) =>
      Number.isNaN(radarMm) ? Number.NaN : Math.max(0, depth(x, y, radarMm, rangeKm)),
  });
  switch (name) {
    case "none":
      return constantFactor(1);
    case "mean-field-bias":
      return constantFactor(ratioOfSums(gauges, settings));
    case "log-mean-bias": {
      const ratios = logRatios(gauges, settings);
      if (ratios.length === 0) return instead("no gauge and radar both wet");
      return constantFactor(Math.exp(ratios.reduce((sum, { log }) => sum + log, 0) / ratios.length));
    }
    case "kalman-bias":
      return filteredFactor(gauges, settings);
    case "range-dependent": {
      const ratios = logRatios(places, settings).filter(({ at }) => Number.isFinite(at.rangeKm));
      if (ratios.length < RANGE_FROM)
        return instead(`${ratios.length} ratios by range, ${RANGE_FROM} needed`);
      const polynomial = rangePolynomial(
        ratios.map(({ at }) => at.rangeKm),
        ratios.map(({ log }) => log / Math.LN10),
      );
      if (polynomial === undefined) return instead("all gauges at the same range");
      const mean = ratioOfSums(gauges, settings);
      return field((_x, _y, radarMm, rangeKm) =>
        Number.isNaN(rangeKm)
          ? radarMm * mean
          : radarMm * limited(rangeFactor(polynomial, rangeKm), settings.factorLimits),
      );
    }
    case "brandes": {
      const ratios = logRatios(places, settings);
      if (ratios.length < 2) return instead("fewer than 2 ratios");
      const at = ratios.map((ratio) => ratio.at);
      const spread = twoPassFactor(
        placesOf(at),
        ratios.map(({ log }) => Math.exp(log)),
        lengthFromSpacing(networkAreaKm2(at), at.length).lengthKm2,
        CONVERGENCE,
      );
      const mean = ratioOfSums(gauges, settings);
      return field((x, y, radarMm) => {
        const { factor } = spread.at(x, y);
        return radarMm * (Number.isNaN(factor) ? mean : limited(factor, settings.factorLimits));
      });
    }
    case "kriging-bayesian": {
      const ratios = logRatios(places, settings);
      if (ratios.length < BAYESIAN_FROM) return instead(`${ratios.length} ratios, ${BAYESIAN_FROM} needed`);
      const at = ratios.map((ratio) => ratio.at);
      const log = bayesianLogFactor(
        {
          places: placesOf(at),
          logFactor: ratios.map((ratio) => ratio.log),
          logRadar: at.map(({ radarMm }) => Math.log(radarMm)),
          errorVariance: depthErrors(at, settings).map((error, i) => error / at[i].gaugeMm ** 2),
        },
        Math.sqrt(networkAreaKm2(at) / at.length),
      );
      return field((x, y, radarMm) =>
        radarMm > 0 ? radarMm * limited(Math.exp(log(x, y, Math.log(radarMm))), settings.factorLimits) : 0,
      );
    }
    case "combined":
      return combined(COMBINED.map((part) => learnMethod(part, gauges, settings)));
    case "gauges-alone": {
      if (places.length === 0) return instead("no gauge with a whole window");
      const depth = gaugesAlone(places, settings, (note) => notes.push(note));
      return field((x, y) => depth(x, y));
    }
    case "idw-additive":
    case "kriging-additive": {
      if (places.length === 0) return instead("no gauge with a whole window");
      const residual = interpolant(
        name === "kriging-additive",
        places,
        places.map(({ gaugeMm, radarMm }) => gaugeMm - radarMm),
        depthErrors(places, settings),
        settings,
        notes,
      );
      return field((x, y, radarMm) => radarMm + residual(x, y));
    }
    case "idw-multiplicative":
    case "kriging-multiplicative": {
      const ratios = logRatios(places, settings);
      if (ratios.length < 2) return instead("fewer than 2 ratios");
      const at = ratios.map((ratio) => ratio.at);
      const errors = depthErrors(at, settings).map((error, i) => error / at[i].gaugeMm ** 2);
      const logs = ratios.map(({ log }) => log);
      const log = interpolant(name === "kriging-multiplicative", at, logs, errors, settings, notes);
      // The median of the factor: the mean would ask for the variance and brings a bias of its own.
      return field((x, y, radarMm) => radarMm * limited(Math.exp(log(x, y)), settings.factorLimits));
    }
    case "idw-mixed":
    case "kriging-mixed": {
      if (places.length === 0) return instead("no gauge with a whole window");
      const splits = places.map(({ gaugeMm, radarMm }) => splitMismatch(gaugeMm, radarMm, TURN_MM));
      // What 1 mm of mismatch would be split into: how an error of the gauge enters each part.
      const shares = places.map(({ radarMm }) => splitMismatch(radarMm + 1, radarMm, TURN_MM));
      const errors = depthErrors(places, settings);
      const part = (of: "relative" | "absolute"): Interpolant =>
        interpolant(
          name === "kriging-mixed",
          places,
          splits.map((split) => split[of]),
          errors.map((error, i) => error * shares[i][of] ** 2),
          settings,
          notes,
        );
      const relative = part("relative");
      const absolute = part("absolute");
      return field((x, y, radarMm) => radarMm * (1 + relative(x, y)) + absolute(x, y));
    }
    case "conditional-merging": {
      if (places.length === 0) return instead("no gauge with a whole window");
      // Radar + OK(gauges) - OK(radar at gauges) under one variogram is radar + OK(gauges - radar) under it
      // (Ehret 2002; Sinclair & Pegram 2005, Atmospheric Science Letters 6, 19-22): one system instead of two.
      const model = variogramOf(
        placesOf(places),
        places.map(({ gaugeMm }) => gaugeMm),
        settings,
      );
      const residual = krigedOr(
        placesOf(places),
        places.map(({ gaugeMm, radarMm }) => gaugeMm - radarMm),
        depthErrors(places, settings),
        model,
        (note) => notes.push(note),
      );
      return field((x, y, radarMm) => radarMm + residual(x, y));
    }
    case "kriging-external-drift": {
      if (places.length < DRIFT_FROM) return instead(`${places.length} gauge places, ${DRIFT_FROM} needed`);
      const drifted = externalDrift(places, settings, (note) => notes.push(note));
      if (drifted !== undefined) return field((x, y, radarMm) => drifted(x, y, radarMm));
      notes.push(
        "the radar depth does not tell the gauges apart: ordinary kriging of the gauges in its place",
      );
      const depth = gaugesAlone(places, settings, (note) => notes.push(note));
      return field((x, y) => depth(x, y));
    }
  }
}

/** Depth of the window by ordinary kriging of the gauges, without the radar; may be a hair below 0. */
function gaugesAlone(
  places: readonly GaugePlace[],
  settings: MethodSettings,
  note: (text: string) => void,
): Interpolant {
  const at = placesOf(places);
  const depths = places.map(({ gaugeMm }) => gaugeMm);
  return krigedOr(at, depths, depthErrors(places, settings), variogramOf(at, depths, settings), note);
}

/** Kriging with the radar depth as drift; the variogram is that of what a straight line in it leaves. */
function externalDrift(
  places: readonly GaugePlace[],
  settings: MethodSettings,
  note: (text: string) => void,
): ((x: number, y: number, radarMm: number) => number) | undefined {
  const at = placesOf(places);
  const n = places.length;
  const gauge = places.map(({ gaugeMm }) => gaugeMm);
  const radar = places.map(({ radarMm }) => radarMm);
  const meanGauge = gauge.reduce((sum, value) => sum + value, 0) / n;
  const meanRadar = radar.reduce((sum, value) => sum + value, 0) / n;
  const squares = radar.reduce((sum, value) => sum + (value - meanRadar) ** 2, 0);
  if (!(squares > 0)) return undefined;
  const slope =
    radar.reduce((sum, value, i) => sum + (value - meanRadar) * (gauge[i] - meanGauge), 0) / squares;
  const left = gauge.map((value, i) => value - meanGauge - slope * (radar[i] - meanRadar));
  const model = variogramOf(at, left, settings);
  if (model === undefined) {
    note("no variogram to krige with: the straight line between radar and gauges in its place");
    return (_x, _y, radarMm) => meanGauge + slope * (radarMm - meanRadar);
  }
  const { field, errors } = nuggetAsError(model, depthErrors(places, settings));
  const system = krigingSystem({
    places: at,
    values: gauge,
    model: field,
    errorVariance: errors,
    drift: [radar],
  });
  if (typeof system === "string") return undefined;
  const own = [0];
  return (x, y, radarMm) => {
    own[0] = radarMm;
    return system.value(x, y, own);
  };
}

function interpolant(
  kriged: boolean,
  places: readonly GaugePlace[],
  values: readonly number[],
  errorVariance: readonly number[],
  settings: MethodSettings,
  notes: string[],
): Interpolant {
  const at = placesOf(places);
  if (!kriged) return (x, y) => inverseDistance(at, values, 2, x, y);
  return krigedOr(at, values, errorVariance, variogramOf(at, values, settings), (note) => notes.push(note));
}

/**
 * The mean of what `COMBINED` have learned. Two sound forecasts that err in different ways are worth more together, and
 * equal weights do as well as fitted ones (Bates & Granger 1969, Operational Research Quarterly 20, 451-468).
 */
export function combined(parts: readonly LearnedMethod[]): LearnedMethod {
  return {
    kind: "field",
    usesRange: false,
    notes: parts.flatMap((part) => part.notes),
    depthMm: (x, y, radarMm, rangeKm) =>
      Number.isNaN(radarMm)
        ? Number.NaN
        : parts.reduce((sum, part) => sum + windowDepthMm(part, x, y, radarMm, rangeKm), 0) / parts.length,
  };
}

/** Depth of the window by one of the parts of a combination, whose factors, if it has fallen back on one, are constant. */
function windowDepthMm(part: LearnedMethod, x: number, y: number, radarMm: number, rangeKm: number): number {
  return part.kind === "field" ? part.depthMm(x, y, radarMm, rangeKm) : radarMm * part.factorAt(0);
}

function constantFactor(factor: number): LearnedMethod {
  return { kind: "factor", constant: true, factorAt: () => factor, notes: [] };
}

/**
 * The filtered factor, its logarithm linear in time between the middles of intervals, held before the first
 * and after the last. The log bias returns to that of the whole window, for the window is known when it is
 * worked out. The median factor is applied.
 */
function filteredFactor(gauges: readonly WindowGauge[], settings: MethodSettings): LearnedMethod {
  const { window, pairIntervalMs, kalman, factorLimits } = settings;
  const count = Math.max(1, Math.ceil((window.endEpochMs - window.startEpochMs) / pairIntervalMs));
  const observations = Array.from({ length: count }, () => ({ pairCount: 0, gaugeSumMm: 0, radarSumMm: 0 }));
  for (const { readings } of gauges) {
    for (const { startEpochMs, endEpochMs, gaugeMm, radarMm } of readings) {
      const middle = (startEpochMs + endEpochMs) / 2;
      const k = Math.floor((middle - window.startEpochMs) / pairIntervalMs);
      if (k < 0 || k >= count) continue;
      observations[k].gaugeSumMm += gaugeMm;
      observations[k].radarSumMm += radarMm;
      // A pair that both sides call dry says nothing of a factor.
      if (gaugeMm > 0 || radarMm > 0) observations[k].pairCount++;
    }
  }
  const steps = kalmanBias(observations, {
    ...kalman,
    meanLogBias: Math.log(ratioOfSums(gauges, settings)),
  });
  const logs = steps.map(({ logBias }) => Math.log(limited(Math.exp(logBias), factorLimits)));
  return {
    kind: "factor",
    constant: false,
    notes: [],
    factorAt(epochMs) {
      const position = (epochMs - window.startEpochMs) / pairIntervalMs - 0.5;
      const before = Math.min(count - 1, Math.max(0, Math.floor(position)));
      const after = Math.min(count - 1, before + 1);
      const share = Math.min(1, Math.max(0, position - before));
      return Math.exp(logs[before] + share * (logs[after] - logs[before]));
    },
  };
}

/** NaN where the radar saw no rain at the gauges: nothing to multiply. */
function ratioOfSums(gauges: readonly WindowGauge[], { factorLimits }: MethodSettings): number {
  const gaugeSum = gauges.reduce((sum, { gaugeMm }) => sum + gaugeMm, 0);
  const radarSum = gauges.reduce((sum, { radarMm }) => sum + radarMm, 0);
  return radarSum > 0 ? limited(gaugeSum / radarSum, factorLimits) : Number.NaN;
}

/** Log factors gauge/radar where both reach the threshold, held between the limits. */
function logRatios<G extends { readonly gaugeMm: number; readonly radarMm: number }>(
  gauges: readonly G[],
  { thresholdMm, factorLimits }: MethodSettings,
): { readonly at: G; readonly log: number }[] {
  return gauges
    .filter(({ gaugeMm, radarMm }) => gaugeMm >= thresholdMm && radarMm >= thresholdMm)
    .map((at) => ({ at, log: Math.log(limited(at.gaugeMm / at.radarMm, factorLimits)) }));
}

/** Variance of the error of each place's depth, mm². */
function depthErrors(places: readonly GaugePlace[], { gaugeErrorShare }: MethodSettings): number[] {
  return places.map(({ gaugeMm, count }) => (LEAST_ERROR_MM ** 2 + (gaugeErrorShare * gaugeMm) ** 2) / count);
}

function placesOf(places: readonly GaugePlace[]): { xKm: number[]; yKm: number[] } {
  return { xKm: places.map(({ xKm }) => xKm), yKm: places.map(({ yKm }) => yKm) };
}

/** Area that a network covers: its rectangle, or the square on a quarter of its length where it is a line. */
function networkAreaKm2(places: readonly GaugePlace[]): number {
  const xs = places.map(({ xKm }) => xKm);
  const ys = places.map(({ yKm }) => yKm);
  const width = Math.max(...xs) - Math.min(...xs);
  const height = Math.max(...ys) - Math.min(...ys);
  return Math.max(width * height, (Math.max(width, height) / 4) ** 2, 1);
}

function limited(factor: number, [low, high]: readonly [low: number, high: number]): number {
  return Math.min(high, Math.max(low, factor));
}
