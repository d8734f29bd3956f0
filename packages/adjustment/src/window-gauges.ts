import { gaugeKey, type Interval, type Pair } from "@rainreckon/core";

/** One used pair of a gauge. */
export interface GaugeReading extends Interval {
  readonly gaugeMm: number;
  readonly radarMm: number;
}

/** A trusted gauge over the window, with the pairs that its sums are made of. */
export interface WindowGauge {
  readonly network: string;
  readonly gaugeId: string;
  readonly xKm: number;
  readonly yKm: number;
  readonly rangeKm: number;
  /** Sums over the used pairs, mm. */
  readonly gaugeMm: number;
  readonly radarMm: number;
  /** Radar depth of its cell over all the time that the radar observed, mm. */
  readonly radarTotalMm: number;
  /**
   * The same two at the very point, between the middles of four cells, mm: a gauge at the edge of its cell sees
   * another rain than the middle does. Methods that interpolate compare with these.
   */
  readonly radarPointMm: number;
  readonly radarPointTotalMm: number;
  /** Share of that time that the pairs cover, at most 1. */
  readonly coverage: number;
  /**
   * Whether the pairs cover the time that the radar observed: only then is a difference of sums one of the
   * window. Factors may use the others all the same.
   */
  readonly complete: boolean;
  readonly readings: readonly GaugeReading[];
}

/** Share of the radar's observed time that the pairs of a complete gauge cover. House rule. */
const COMPLETE_FROM = 0.95;

/**
 * Where gauges stand in the grid's plane, metres, and the radar's window depth of their cell and at their point
 * (`depthAtPoint`), mm; by `gaugeKey`.
 */
export type GaugePlaces = ReadonlyMap<
  string,
  {
    readonly xM: number;
    readonly yM: number;
    readonly radarTotalMm: number;
    readonly radarPointTotalMm: number;
  }
>;

/**
 * Gauges with their sums over used pairs, in the order in which they first appear.
 *
 * @param pairs - pairs by interval, all gauges; each time of each gauge in one pair only
 * @param places - a gauge without a place takes no part
 */
export function windowGauges(pairs: readonly Pair[], places: GaugePlaces): WindowGauge[] {
  const byGauge = new Map<string, Pair[]>();
  for (const pair of pairs) {
    const key = gaugeKey({ network: pair.network, id: pair.gaugeId });
    const own = byGauge.get(key);
    if (own === undefined) byGauge.set(key, [pair]);
    else own.push(pair);
  }
  const gauges: WindowGauge[] = [];
  for (const [key, own] of byGauge) {
    const place = places.get(key);
    const used = own.filter((pair) => pair.used);
    if (place === undefined || used.length === 0) continue;
    const observedMs = own.reduce((sum, pair) => sum + pair.radarObservedFraction * lengthMs(pair), 0);
    const commonMs = used.reduce((sum, pair) => sum + pair.commonFraction * lengthMs(pair), 0);
    const radarMm = used.reduce((sum, pair) => sum + pair.radarMm, 0);
    const coverage = observedMs > 0 ? Math.min(1, commonMs / observedMs) : 0;
    const { radarTotalMm, radarPointTotalMm } = place;
    gauges.push({
      network: used[0].network,
      gaugeId: used[0].gaugeId,
      xKm: place.xM / 1000,
      yKm: place.yM / 1000,
      rangeKm: used[0].rangeKm,
      gaugeMm: used.reduce((sum, pair) => sum + pair.gaugeMm, 0),
      radarMm,
      radarTotalMm,
      radarPointMm: radarPointTotalMm * (radarTotalMm > 0 ? radarMm / radarTotalMm : coverage),
      radarPointTotalMm,
      coverage,
      complete: commonMs >= COMPLETE_FROM * observedMs,
      readings: used.map(({ startEpochMs, endEpochMs, gaugeMm, radarMm }) => ({
        startEpochMs,
        endEpochMs,
        gaugeMm,
        radarMm,
      })),
    });
  }
  return gauges;
}

function lengthMs({ startEpochMs, endEpochMs }: Interval): number {
  return endEpochMs - startEpochMs;
}

/** Gauges closer together than this stand in one place, km. */
const ONE_PLACE_KM = 0.005;

/** A place with one gauge or several: what is interpolated from. */
export interface GaugePlace {
  readonly xKm: number;
  readonly yKm: number;
  /** Means over its gauges. */
  readonly gaugeMm: number;
  /** At the very point. */
  readonly radarMm: number;
  readonly rangeKm: number;
  /** How many gauges; the variance of the mean's error is that of one over this. */
  readonly count: number;
}

/**
 * Gauges that stand in one place become one, with the mean of their depths: two of them would make a
 * system of equations singular, and few solvers say so.
 */
export function mergeCoincident(gauges: readonly WindowGauge[]): GaugePlace[] {
  const places: { xKm: number; yKm: number; members: WindowGauge[] }[] = [];
  for (const gauge of gauges) {
    const near = places.find(
      (place) => Math.hypot(place.xKm - gauge.xKm, place.yKm - gauge.yKm) <= ONE_PLACE_KM,
    );
    if (near === undefined) places.push({ xKm: gauge.xKm, yKm: gauge.yKm, members: [gauge] });
    else near.members.push(gauge);
  }
  return places.map(({ xKm, yKm, members }) => {
    const mean = (of: (gauge: WindowGauge) => number) =>
      members.reduce((sum, gauge) => sum + of(gauge), 0) / members.length;
    return {
      xKm,
      yKm,
      gaugeMm: mean((gauge) => gauge.gaugeMm),
      radarMm: mean((gauge) => gauge.radarPointMm),
      rangeKm: mean((gauge) => gauge.rangeKm),
      count: members.length,
    };
  });
}
