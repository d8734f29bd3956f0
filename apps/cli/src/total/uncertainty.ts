import { durationMs } from "@rainreckon/accumulation";
import {
  areaRange,
  type CrossValidation,
  type DepthRange,
  type EchoQuality,
  type ErrorInTime,
  type ErrorModel,
  type HeldOutGauge,
  type HeldOutResidual,
  type IntervalResidual,
  intervalLogDeviation,
  intervalRange,
  learnErrorInTime,
  learnErrors,
  logSpread,
  pointRange,
  pointToCellVariance,
  spanDepthAt,
  TIP_ROUNDING,
} from "@rainreckon/adjustment";
import { cellCentre, cellIndexAt, gaugeKey, type Interval, SCREENS } from "@rainreckon/core";
import { rangeAt } from "./adjust.ts";
import type { Comparison } from "./against-gauges.ts";
import type { AssembledRun } from "./assemble.ts";
import { companionIndex, tollName } from "./companions.ts";
import { bestMm, type FigurePlace, type PlaceFigure } from "./figures.ts";
import type { PreparedRun } from "./prepare.ts";

/** How sure the depths of a run are: those to use, adjusted where there is an adjustment. */
export interface KnownUncertainty {
  readonly known: true;
  readonly model: ErrorModel;
  readonly time: ErrorInTime;
  /** Depth of the window that it speaks of, mm. Shape [cells]. */
  readonly totalMm: Float32Array;
  /** Spread of the logarithm of truth over it. Shape [cells]; NaN where there is no depth. */
  readonly logSpread: Float32Array;
}

/** The same, or why nothing tells. */
export type Uncertainty = KnownUncertainty | { readonly known: false; readonly reason: string };

/**
 * A gauge's stated error is in part its own, in part that of all gauges alike: height of the rim, wind, heavy rain that
 * buckets lose. Half of it, a quarter of its variance, is its own. House rule.
 */
const OWN_SHARE = 0.5;
/** Resolution of a gauge that does not state one, mm. */
const USUAL_RESOLUTION_MM = 0.2;
/** Distance over which errors are alike that rest on no gauge nearby, km; of the others, in mean distances. House rules. */
const RADAR_RANGE_KM = 15;
const RANGE_IN_SPACINGS = 1.25;
const HOUR_MS = 3_600_000;

/**
 * Learns how far off depths are from gauges that had no part in them.
 *
 * Where gauges are too few to adjust by, nothing is told: a spread from the literature would be a figure of other
 * radars and other storms.
 */
export function learnUncertainty(
  run: PreparedRun,
  total: AssembledRun,
  comparison: Comparison,
  adjustedTotalMm: Float32Array | undefined,
): Uncertainty {
  const { adjustment, choice } = comparison;
  const validation = adjustment.applied ? adjustment.crossValidation : choice?.validation;
  if (validation === undefined) {
    const why = adjustment.applied ? "" : adjustment.reason;
    return { known: false, reason: `no gauges that were held out tell of errors: ${why}` };
  }
  const { gauges } = validation;
  const gaugeErrorShare = run.loaded.plan.adjustment.gaugeErrorPercent / 100;
  const followsGauges =
    adjustment.applied && adjustment.learned.kind === "field" && adjustment.method !== "range-dependent";
  const model = learnErrors(heldOutResiduals(run, total, validation), {
    followsGauges,
    rangeKm: followsGauges ? RANGE_IN_SPACINGS * meanSpacingKm(gauges) : RADAR_RANGE_KM,
    gaugesSpread: gaugeErrorShare * Math.sqrt(1 - OWN_SHARE ** 2),
  });
  const totalMm = adjustedTotalMm ?? total.planes.totalMm;
  const qualityAt = echoQuality(run, total);
  const toNearest = distanceToNearest(gauges);
  const spread = new Float32Array(totalMm.length).fill(Number.NaN);
  for (let cell = 0; cell < totalMm.length; cell++) {
    if (Number.isNaN(totalMm[cell])) continue;
    const { xM, yM } = cellCentre(run.grid, cell);
    spread[cell] = logSpread(model, {
      depthMm: totalMm[cell],
      gaugeDistanceKm: toNearest(xM / 1000, yM / 1000),
      quality: qualityAt(cell),
    });
  }
  return {
    known: true,
    model,
    time: learnErrorInTime(
      intervalResiduals(run, total, comparison, validation, model),
      durationMs(run.loaded.plan.pairs.interval) / HOUR_MS,
      (run.window.endEpochMs - run.window.startEpochMs) / HOUR_MS,
    ),
    totalMm,
    logSpread: spread,
  };
}

/** Standard error of the depth of each cell, mm; NaN where there is no depth. */
export function standardErrorPlane({ model, totalMm, logSpread: spread }: KnownUncertainty): Float32Array {
  return totalMm.map(
    (depthMm, cell) => pointRange(depthMm, model.medianLogError, spread[cell]).standardErrorMm,
  );
}

/**
 * The range of a depth at a cell: of a gauge, of an asset.
 *
 * @param depthMm - the figure that the range is about
 * @param span - part of the window; the whole window where it is left out
 */
export function cellRange(
  { model, time, logSpread: spread }: KnownUncertainty,
  cell: number,
  depthMm: number,
  span?: Interval,
): DepthRange {
  const whole = pointRange(depthMm, model.medianLogError, spread[cell] ?? Number.NaN);
  return span === undefined ? whole : intervalRange(whole, depthMm, depthMm, time, hoursOf(span));
}

/** Ranges of an area: of the window, and of any part of it. */
export interface AreaRanges {
  readonly window: DepthRange;
  /** @param depthMm - the depth of the span that the range is about */
  ofSpan(span: Interval, depthMm: number): DepthRange;
}

/** Ranges of the mean depth of an area; all NaN where nothing of it was observed. */
export function areaRanges(
  run: PreparedRun,
  { model, time, totalMm, logSpread: spread }: KnownUncertainty,
  { cells, fraction }: PreparedRun["district"],
): AreaRanges {
  const inside = Array.from(cells.keys()).filter((k) => totalMm[cells[k]] >= 0);
  const centres = inside.map((k) => cellCentre(run.grid, cells[k]));
  const window = areaRange(
    {
      xKm: centres.map(({ xM }) => xM / 1000),
      yKm: centres.map(({ yM }) => yM / 1000),
      depthMm: inside.map((k) => totalMm[cells[k]]),
      logSpread: inside.map((k) => spread[cells[k]]),
      fraction: inside.map((k) => fraction[k]),
    },
    model,
  );
  const whole = inside.reduce((sum, k) => sum + fraction[k], 0);
  const windowMm = inside.reduce((sum, k) => sum + fraction[k] * totalMm[cells[k]], 0) / whole;
  return {
    window,
    ofSpan: (span, depthMm) => intervalRange(window, windowMm, depthMm, time, hoursOf(span)),
  };
}

/** The range of each row of a table of places; undefined where nothing tells. */
export function rangesOfRows(
  run: PreparedRun,
  uncertainty: Uncertainty,
): (row: PlaceFigure<FigurePlace>) => DepthRange | undefined {
  const known = new Map<FigurePlace, AreaRanges>();
  return (row) => {
    if (!uncertainty.known) return undefined;
    const { place, span, figure } = row;
    const ranges = known.get(place) ?? areaRanges(run, uncertainty, place.cells);
    known.set(place, ranges);
    return span === "window" ? ranges.window : ranges.ofSpan(row, bestMm(figure));
  };
}

/** How each cell was seen. */
function echoQuality(run: PreparedRun, total: AssembledRun): (cell: number) => EchoQuality {
  const { planes } = total;
  const tolls = SCREENS.map((screen) => planes.companions[companionIndex(tollName(screen))]);
  const loss = planes.companions[companionIndex("two_way_loss")];
  const blocked = planes.companions[companionIndex("blocked_fraction")];
  return (cell) => {
    const screenedMm = tolls.reduce((sum, toll) => sum + (toll?.[cell] || 0), 0);
    const wholeMm = screenedMm + (planes.totalMm[cell] || 0);
    const beamHeightM = planes.beamHeightAslM[cell] ?? Number.NaN;
    return {
      beamHeightM,
      // Asked only where the height is not known: a geodesic for each cell of a large map would take long.
      rangeKm: beamHeightM > 0 ? Number.NaN : rangeAt(run, total, cell),
      lossDb: loss?.[cell] ?? Number.NaN,
      blockedFraction: blocked?.[cell] ?? Number.NaN,
      screenedFraction: wholeMm > 0 ? screenedMm / wholeMm : 0,
      bridgedFraction: planes.bridgedFraction[cell] ?? Number.NaN,
    };
  };
}

/** Residuals of the window at held-out gauges, each with how far from the gauges it was met by. */
function heldOutResiduals(
  run: PreparedRun,
  total: AssembledRun,
  { gauges }: CrossValidation,
): HeldOutResidual[] {
  const qualityAt = echoQuality(run, total);
  const errorVariance = gaugeErrorVariance(run);
  return gauges.map((held) => {
    const { gauge, crossValidatedMm, learned } = held;
    const cell = cellIndexAt(run.grid, gauge.xKm * 1000, gauge.yKm * 1000);
    // Gauges that were held out together share what learned without them.
    const others = gauges.filter((other) => other.learned !== learned);
    return {
      xKm: gauge.xKm,
      yKm: gauge.yKm,
      gaugeMm: gauge.gaugeMm,
      depthMm: crossValidatedMm,
      gaugeDistanceKm: nearestKm(others, gauge.xKm, gauge.yKm),
      // A field is asked at the gauge's very point, a factor of its cell.
      gaugeVarianceMm2:
        errorVariance(held, gauge.gaugeMm) +
        (learned.kind === "field" ? 0 : pointToCellVariance(run.grid, total.planes.totalMm, cell)),
      quality: qualityAt(cell),
    };
  });
}

/** Residuals of intervals against those of their window. */
function intervalResiduals(
  run: PreparedRun,
  total: AssembledRun,
  { pairs }: Comparison,
  { gauges }: CrossValidation,
  model: ErrorModel,
): IntervalResidual[] {
  const { thresholdMm } = run.loaded.plan.pairs;
  const errorVariance = gaugeErrorVariance(run);
  const qualityAt = echoQuality(run, total);
  return gauges.flatMap((held) => {
    const { gauge, crossValidatedMm, learned, share } = held;
    const own = pairs.filter(
      (pair) => pair.used && pair.network === gauge.network && pair.gaugeId === gauge.gaugeId,
    );
    const cell = cellIndexAt(run.grid, gauge.xKm * 1000, gauge.yKm * 1000);
    const windowSpread = logSpread(model, {
      depthMm: crossValidatedMm,
      gaugeDistanceKm: nearestKm(
        gauges.filter((other) => other.learned !== learned),
        gauge.xKm,
        gauge.yKm,
      ),
      quality: qualityAt(cell),
    });
    return own.flatMap((pair) => {
      const depthMm = spanDepthAt(learned, gauge, pair, pair.radarMm, share);
      // Drizzle is all rounding: it tells nothing of how errors go on.
      if (!(depthMm >= thresholdMm && pair.gaugeMm >= thresholdMm)) return [];
      return [
        intervalLogDeviation(
          { gaugeMm: gauge.gaugeMm, depthMm: crossValidatedMm },
          { gaugeMm: pair.gaugeMm, depthMm },
          errorVariance(held, pair.gaugeMm),
          windowSpread,
        ),
      ];
    });
  });
}

/** Variance of a gauge's own error: a share of its depth, and the rounding of its tips. */
function gaugeErrorVariance(run: PreparedRun): (held: HeldOutGauge, depthMm: number) => number {
  const share = OWN_SHARE * (run.loaded.plan.adjustment.gaugeErrorPercent / 100);
  const resolution = new Map(
    run.gauges.gauges.map(({ series }) => [gaugeKey(series), series.resolutionMm ?? USUAL_RESOLUTION_MM]),
  );
  return ({ gauge }, depthMm) => {
    const tipMm =
      resolution.get(gaugeKey({ network: gauge.network, id: gauge.gaugeId })) ?? USUAL_RESOLUTION_MM;
    return (share * depthMm) ** 2 + (TIP_ROUNDING * tipMm) ** 2;
  };
}

function nearestKm(gauges: readonly Pick<HeldOutGauge, "gauge">[], xKm: number, yKm: number): number {
  return distanceToNearest(gauges)(xKm, yKm);
}

/** Distance to the nearest of some gauges, km; Infinity where there is none. */
function distanceToNearest(
  gauges: readonly Pick<HeldOutGauge, "gauge">[],
): (xKm: number, yKm: number) => number {
  const x = Float64Array.from(gauges, ({ gauge }) => gauge.xKm);
  const y = Float64Array.from(gauges, ({ gauge }) => gauge.yKm);
  return (xKm, yKm) => {
    let nearest = Number.POSITIVE_INFINITY;
    for (let i = 0; i < x.length; i++) {
      const squared = (x[i] - xKm) ** 2 + (y[i] - yKm) ** 2;
      if (squared < nearest) nearest = squared;
    }
    return Math.sqrt(nearest);
  };
}

/** Side of the square that each gauge has to itself in the rectangle around all, km; on a line, their distance. */
function meanSpacingKm(gauges: readonly HeldOutGauge[]): number {
  const extent = (of: (gauge: HeldOutGauge["gauge"]) => number) => {
    const values = gauges.map(({ gauge }) => of(gauge));
    return Math.max(...values) - Math.min(...values);
  };
  const [width, height] = [extent(({ xKm }) => xKm), extent(({ yKm }) => yKm)];
  const area = Math.max(width * height, Math.max(width, height) ** 2 / gauges.length);
  return Math.max(1, Math.sqrt(area / gauges.length));
}

function hoursOf({ startEpochMs, endEpochMs }: Interval): number {
  return (endEpochMs - startEpochMs) / HOUR_MS;
}
