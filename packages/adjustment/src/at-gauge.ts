import { cellCentre, type Grid, type Interval } from "@rainreckon/core";
import type { LearnedMethod } from "./methods.ts";
import type { WindowGauge } from "./window-gauges.ts";

/** What is asked of a place that has pairs, trusted or not. */
export type PairedPlace = Pick<
  WindowGauge,
  "xKm" | "yKm" | "rangeKm" | "radarMm" | "radarTotalMm" | "radarPointTotalMm" | "coverage" | "readings"
>;

/**
 * Depth at a point, linear between the middles of the four cells around it: a point is not the middle of its cell,
 * and in showers that is worth more than most errors of a gauge. Where one of the four is not observed or there is
 * none, the depth of the point's own cell stands.
 *
 * @param depthMm - shape [ny, nx]; NaN is not observed
 * @param ownMm - the depth of the cell that the point lies in
 */
export function depthAtPoint(
  grid: Grid,
  depthMm: Float32Array,
  xM: number,
  yM: number,
  ownMm: number,
): number {
  const first = cellCentre(grid, 0);
  const column = (xM - first.xM) / grid.cellM;
  const row = (first.yM - yM) / grid.cellM;
  const [west, north] = [Math.floor(column), Math.floor(row)];
  if (west < 0 || north < 0 || west + 1 >= grid.nx || north + 1 >= grid.ny) return ownMm;
  const [east, south] = [column - west, row - north];
  const at = north * grid.nx + west;
  const mm =
    (1 - south) * ((1 - east) * depthMm[at] + east * depthMm[at + 1]) +
    south * ((1 - east) * depthMm[at + grid.nx] + east * depthMm[at + grid.nx + 1]);
  return Number.isNaN(mm) ? ownMm : mm;
}

/** Share of the window's rain that fell in a span. Shares of spans that fill the window add up to 1. */
export type RainShare = (span: Interval) => number;

/**
 * When the rain of the window fell, on average over gauges: what gives shape to rain that an additive method
 * puts where the radar saw none at all. Rain is taken to be even within one reading.
 */
export function meanRainShare(gauges: readonly WindowGauge[]): RainShare {
  const byInterval = new Map<number, { startEpochMs: number; endEpochMs: number; gaugeMm: number }>();
  let sumMm = 0;
  for (const { startEpochMs, endEpochMs, gaugeMm } of gauges.flatMap(({ readings }) => readings)) {
    const sum = byInterval.get(startEpochMs);
    if (sum === undefined) byInterval.set(startEpochMs, { startEpochMs, endEpochMs, gaugeMm });
    else sum.gaugeMm += gaugeMm;
    sumMm += gaugeMm;
  }
  const intervals = [...byInterval.values()];
  return (span) => {
    let inside = 0;
    for (const { startEpochMs, endEpochMs, gaugeMm } of intervals) {
      const commonMs = Math.min(endEpochMs, span.endEpochMs) - Math.max(startEpochMs, span.startEpochMs);
      if (commonMs > 0) inside += (gaugeMm * commonMs) / (endEpochMs - startEpochMs);
    }
    return sumMm > 0 ? inside / sumMm : 0;
  };
}

/** Depth that a method gives at the very point of a gauge over the time of its pairs, mm. */
export function pairedDepthAt(learned: LearnedMethod, place: PairedPlace): number {
  if (learned.kind === "field") {
    if (learned.ofInterval !== undefined) return readingsDepthAt(learned, place, place.readings);
    const windowMm = fieldAt(learned, place);
    const { radarMm, radarTotalMm, coverage } = place;
    return windowMm * (radarTotalMm > 0 ? radarMm / radarTotalMm : coverage);
  }
  const { radarTotalMm, radarPointTotalMm } = place;
  const toPoint = radarTotalMm > 0 ? radarPointTotalMm / radarTotalMm : 1;
  return place.readings.reduce(
    (sum, reading) => sum + toPoint * reading.radarMm * learned.factorAt(middle(reading)),
    0,
  );
}

/** Depth over some readings by a method that learns intervals by themselves: each by its own, or by the window's. */
function readingsDepthAt(
  learned: Extract<LearnedMethod, { kind: "field" }>,
  place: PairedPlace,
  readings: PairedPlace["readings"],
): number {
  const { xKm, yKm, rangeKm, radarTotalMm, radarPointTotalMm } = place;
  const toPoint = radarTotalMm > 0 ? radarPointTotalMm / radarTotalMm : 1;
  const windowRatio = radarTotalMm > 0 ? fieldAt(learned, place) / radarTotalMm : 0;
  return readings.reduce((sum, reading) => {
    const part = learned.ofInterval?.(reading);
    const { radarMm } = reading;
    return sum + (part === undefined ? radarMm * windowRatio : part(xKm, yKm, radarMm * toPoint, rangeKm));
  }, 0);
}

function fieldAt(
  learned: Extract<LearnedMethod, { kind: "field" }>,
  { xKm, yKm, radarPointTotalMm, rangeKm }: PairedPlace,
): number {
  return learned.depthMm(xKm, yKm, radarPointTotalMm, rangeKm);
}

/**
 * Depth of a span that a method gives at a gauge, mm: the radar's shape in time is kept. Where the radar saw
 * nothing all window long, the shape is that of the gauges' mean.
 *
 * @param radarMm - radar depth of the span at the gauge; NaN gives NaN
 */
export function spanDepthAt(
  learned: LearnedMethod,
  place: PairedPlace,
  span: Interval,
  radarMm: number,
  share: RainShare,
): number {
  if (Number.isNaN(radarMm)) return Number.NaN;
  // Over several intervals: what each comes to, weighted by what the radar saw in it.
  const inside = place.readings.filter(
    ({ startEpochMs, endEpochMs }) => startEpochMs >= span.startEpochMs && endEpochMs <= span.endEpochMs,
  );
  const seenMm = inside.reduce((sum, reading) => sum + reading.radarMm, 0);
  if (learned.kind === "field") {
    if (learned.ofInterval !== undefined && seenMm > 0)
      return (radarMm * readingsDepthAt(learned, place, inside)) / seenMm;
    const windowMm = fieldAt(learned, place);
    return place.radarTotalMm > 0 ? (radarMm * windowMm) / place.radarTotalMm : windowMm * share(span);
  }
  if (learned.constant || !(seenMm > 0)) return radarMm * learned.factorAt(middle(span));
  const adjustedMm = inside.reduce(
    (sum, reading) => sum + reading.radarMm * learned.factorAt(middle(reading)),
    0,
  );
  return (radarMm * adjustedMm) / seenMm;
}

function middle({ startEpochMs, endEpochMs }: Interval): number {
  return (startEpochMs + endEpochMs) / 2;
}
