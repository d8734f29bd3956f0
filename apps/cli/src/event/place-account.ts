import {
  antecedentDepth,
  type DurationMaximum,
  depthOfSteps,
  durationMaxima,
  type EventRule,
  fixedToSlidingRatio,
  meanRateMmPerHour,
  type NoMaximum,
  type RainEvent,
  type RainSeries,
  rainEvents,
  type StepRange,
} from "@rainreckon/accumulation";
import { isoUtc } from "../ui/numbers.ts";
import { comparisonNotes, type Frequency, periodOf } from "./frequency-told.ts";
import { type DepthEnds, isLowerBound, NO_ENDS, type PlaceSeries } from "./place-series.ts";
import type { EventAccount, Peak, PlaceReport } from "./schema.ts";

const MINUTE_MS = 60_000;
const HOUR_MS = 3_600_000;
/** How far back antecedent rain is looked for, hours. House rule. */
const ANTECEDENT_HOURS = [24, 72, 168];

/** What is asked of every place. */
export interface AccountAsked {
  readonly rule: Omit<EventRule, "wetMm"> & { readonly wetMmPerHour: number };
  readonly durationsMs: readonly number[];
  /** Undefined for windows that begin with any step. */
  readonly clockAnchorEpochMs: number | undefined;
  readonly frequency: Frequency | undefined;
}

/** A place with its events, its largest depths and their return periods. */
export function placeAccount(place: PlaceSeries, asked: AccountAsked): PlaceReport {
  const { best, gauge } = place;
  const rule = { ...asked.rule, wetMm: (asked.rule.wetMmPerHour * best.stepMs) / HOUR_MS };
  const { events, dropped } = rainEvents(best, rule);
  const maxima = peaksOf(place, asked);
  const reduced = maxima.every(
    ({ period, depthMm }) => depthMm === null || period === null || period.arealReduction !== null,
  );
  return {
    kind: place.kind,
    id: place.id,
    name: place.name,
    latDeg: place.latDeg,
    lonDeg: place.lonDeg,
    areaKm2: place.areaKm2,
    figure: place.figure,
    from: place.from,
    exact: place.exact,
    stepMinutes: best.stepMs / MINUTE_MS,
    window: { ...place.window, lowerBound: isLowerBound(place.window) },
    events: events.map((event, k) => eventAccount(event, k + 1, place, asked)),
    dropped,
    maxima,
    gauge: gauge === undefined ? null : gaugeAccount(gauge.verdict, gauge.readings, asked),
    notes: [
      ...place.notes,
      ...(place.exact === false
        ? ["what was made again is not what totals.nc holds to the last bit: see run.version"]
        : []),
      ...(asked.frequency === undefined
        ? []
        : comparisonNotes(asked.frequency, place.areaKm2, place.kind === "catchment", reduced)),
    ],
  };
}

function eventAccount(
  event: RainEvent,
  number: number,
  place: PlaceSeries,
  asked: AccountAsked,
): EventAccount {
  const { startEpochMs, endEpochMs, steps } = event;
  return {
    number,
    start: isoUtc(startEpochMs),
    end: isoUtc(endEpochMs),
    depthMm: event.depthMm,
    ...place.rangeOf(steps, event.depthMm),
    observedFraction: event.observedFraction,
    lowerBound: isLowerBound(event),
    atCap: event.atCap,
    unseenSteps: event.unseenSteps,
    mayBeginEarlier: event.mayBeginEarlier,
    mayEndLater: event.mayEndLater,
    antecedent: ANTECEDENT_HOURS.map((hours) => {
      const before = antecedentDepth(place.best, startEpochMs, hours * HOUR_MS);
      return {
        hours,
        depthMm: known(before.depthMm),
        observedFraction: before.observedFraction,
        lowerBound: isLowerBound(before),
      };
    }),
    peaks: peaksOf(place, asked, steps),
  };
}

function peaksOf(place: PlaceSeries, asked: AccountAsked, sharing?: StepRange): Peak[] {
  const { best, areaKm2 } = place;
  return maximaOf(best, asked, sharing).map((found) => {
    if ("reason" in found) return noPeak(found, areaKm2);
    const range = stepsOf(best, found);
    const radar = depthOfSteps({ ...best, depthMm: place.radarMm }, range);
    return peakOf(
      found,
      best,
      areaKm2,
      known(radar.depthMm),
      place.rangeOf(range, found.depthMm),
      asked.frequency,
    );
  });
}

function gaugeAccount(
  verdict: string,
  readings: RainSeries,
  asked: AccountAsked,
): NonNullable<PlaceReport["gauge"]> {
  const whole = depthOfSteps(readings, { from: 0, to: readings.depthMm.length });
  return {
    verdict,
    depthMm: known(whole.depthMm),
    observedFraction: whole.observedFraction,
    maxima: maximaOf(readings, asked).map((found) =>
      // A gauge is a point: the least area that can be written is far below any table's.
      "reason" in found
        ? noPeak(found, POINT_KM2)
        : { ...peakOf(found, readings, 0, null, NO_ENDS, asked.frequency), areaKm2: POINT_KM2 },
    ),
  };
}

/** Area of a gauge's orifice, 200 cm²: common practice. */
const POINT_KM2 = 2e-8;

function maximaOf(
  series: RainSeries,
  { durationsMs, clockAnchorEpochMs }: AccountAsked,
  sharing?: StepRange,
): (DurationMaximum | NoMaximum)[] {
  return durationMaxima(series, durationsMs, {
    ...(sharing === undefined ? {} : { sharing }),
    ...(clockAnchorEpochMs === undefined ? {} : { clockAnchorEpochMs }),
  });
}

function peakOf(
  found: DurationMaximum,
  { stepMs }: RainSeries,
  areaKm2: number,
  radarMm: number | null,
  interval: DepthEnds,
  frequency: Frequency | undefined,
): Peak {
  const { durationMs, depthMm } = found;
  const durationMinutes = durationMs / MINUTE_MS;
  const lowerBound = isLowerBound(found);
  return {
    durationMinutes,
    areaKm2,
    start: isoUtc(found.startEpochMs),
    end: isoUtc(found.endEpochMs),
    depthMm,
    radarMm,
    ...interval,
    meanMmPerHour: meanRateMmPerHour(depthMm, durationMs),
    observedFraction: found.observedFraction,
    lowerBound,
    atCap: found.atCap,
    fixedToSlidingRatio: fixedToSlidingRatio(durationMs / stepMs),
    reason: null,
    period:
      frequency === undefined
        ? null
        : periodOf(frequency, { durationMinutes, areaKm2, depthMm, ...interval, lowerBound }),
  };
}

function noPeak({ durationMs, reason }: NoMaximum, areaKm2: number): Peak {
  return {
    durationMinutes: durationMs / MINUTE_MS,
    areaKm2,
    start: null,
    end: null,
    depthMm: null,
    radarMm: null,
    p10Mm: null,
    p90Mm: null,
    meanMmPerHour: null,
    observedFraction: 0,
    lowerBound: false,
    atCap: false,
    fixedToSlidingRatio: null,
    reason,
    period: null,
  };
}

function stepsOf({ startEpochMs, stepMs }: RainSeries, found: DurationMaximum): StepRange {
  const from = Math.round((found.startEpochMs - startEpochMs) / stepMs);
  return { from, to: from + Math.round(found.durationMs / stepMs) };
}

function known(value: number): number | null {
  return Number.isNaN(value) ? null : value;
}
