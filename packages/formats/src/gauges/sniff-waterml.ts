import type { GaugeKind, GaugeUnit } from "./gauge-file-spec.ts";
import { found, guessed } from "./guess.ts";
import type { ReadingsGuess } from "./sniff-readings.ts";
import { StampScanner } from "./stamp.ts";
import { usualStepMs } from "./usual-step.ts";
import type { WaterMlSeries } from "./waterml.ts";

const MINUTE_MS = 60_000;

/** What the series of a WaterML file say of themselves: of differing ones, what the first of rain says. */
export function guessWaterMl(series: readonly WaterMlSeries[]): ReadingsGuess {
  const first = series.find(({ uom }) => /^(mm|\[in_i\]|in)/.test(uom)) ?? series[0];
  const isRate = /\/h$|h-1$/.test(first.uom);
  const inches = /in/.test(first.uom);
  const { interpolation } = first;
  const kind: GaugeKind = isRate ? "intensity" : "increments";
  const depth: GaugeUnit = inches ? "in" : "mm";
  const unit: GaugeUnit = isRate ? (inches ? "in/h" : "mm/h") : depth;
  const told = interpolation !== undefined && interpolation !== "other";
  const stamp = interpolation?.startsWith("succeeding") ? "start" : "end";
  const stamps = new StampScanner({ dayHour: 0 });
  const offsets = new Set<number>();
  const times = series.flatMap((one) =>
    one.times.map((time) => {
      if (!stamps.scan(time)) return Number.NaN;
      offsets.add(stamps.offsetMinutes);
      return stamps.clockMs - (Number.isNaN(stamps.offsetMinutes) ? 0 : stamps.offsetMinutes * MINUTE_MS);
    }),
  );
  const sorted = Float64Array.from(times.filter((time) => !Number.isNaN(time))).sort();
  const stepMs = usualStepMs(sorted);
  const withOffset = offsets.size > 0 && ![...offsets].some(Number.isNaN);
  return {
    layout: found("waterml2", "the root element is of WaterML 2.0"),
    columns: found({}, "WaterML names its parts itself"),
    kind: told
      ? found(kind, `the series says ${interpolation}`)
      : guessed(kind, "the series does not say what a value covers"),
    unit:
      first.uom === "" ? guessed(unit, "the series names no unit") : found(unit, "the unit of the series"),
    ...(stepMs === undefined
      ? {}
      : { stepMinutes: guessed(stepMs / MINUTE_MS, "the commonest distance between stamps") }),
    zone: withOffset
      ? found("UTC", "the stamps carry Z or an offset")
      : guessed(undefined, "the stamps name no zone: ask"),
    firstEpochMs: sorted[0] ?? Number.NaN,
    lastEpochMs: sorted[sorted.length - 1] ?? Number.NaN,
    gaugeIds: [...new Set(series.map(({ gaugeId }) => gaugeId))],
    allGaugesSeen: true,
    missing: found([], "nil values say so themselves"),
    qualityCodes: [...new Set(series.flatMap(({ qualities }) => qualities))]
      .filter((code) => code !== "")
      .sort(),
    encoding: found("utf-8", "the XML declaration"),
    decimal: found("point", "XML Schema"),
    dates: found("ymd", "XML Schema"),
    dateOnly: false,
    idFrom: found("column", "the series name their monitoring points"),
    stamp: told
      ? found(stamp, `the series says ${interpolation}`)
      : guessed(stamp, "the series does not say what a value covers"),
  };
}
