import { QUALITY_DOUBT, QUALITY_DROP } from "@rainreckon/core";
import { type CounterOutcome, counterIncrements } from "./counter.ts";
import { displayText } from "./display-text.ts";
import type { FileNotices } from "./file-notices.ts";
import type { GaugeFileCounts } from "./gauge-file-counts.ts";
import type { GaugeFileSpec, Silence } from "./gauge-file-spec.ts";
import { mmPerUnit } from "./gauge-file-spec.ts";
import type { GaugeRows } from "./gauge-rows.ts";
import { ReadingList } from "./reading-list.ts";
import { ACCUMULATED } from "./track.ts";
import { usualStepMs } from "./usual-step.ts";
import type { ZoneClock } from "./zone-clock.ts";

const MINUTE_MS = 60_000;
const HOUR_MS = 3_600_000;
const DAY_MS = 24 * HOUR_MS;
/**
 * More than this in a minute is no rain. Common practice: a margin above the world-record class of about
 * 38 mm in one minute.
 */
export const MAX_MM_PER_MINUTE = 50;
const DEFAULT_JITTER_MM = 0.3;
/** A tip is an instant. It is kept as a reading this long that ends at its stamp. */
export const TIP_MS = 1;

/** What turning rows into readings needs to know beside the rows. */
export interface ReadingContext {
  readonly spec: GaugeFileSpec;
  readonly silence: Silence;
  readonly counts: GaugeFileCounts;
  readonly notices: FileNotices;
  /** The clock of the stamps: days are counted on it. */
  readonly clock: ZoneClock;
}

export interface GaugeReadings {
  readonly readings: ReadingList;
  /** Usual length of a reading, where readings have one. */
  readonly stepMs: number | undefined;
}

/** Readings from the rows of one gauge, by the kind of the file. */
export function readingsOf(rows: GaugeRows, context: ReadingContext): GaugeReadings {
  const { kind } = context.spec;
  if (kind === "tips") return { readings: tipReadings(rows, context), stepMs: undefined };
  const ownStepMs = usualStepMs(stepTimes(rows.epochMs, context));
  const plannedMs = context.spec.stepMinutes === undefined ? undefined : context.spec.stepMinutes * MINUTE_MS;
  if (kind === "counter") {
    const stepMs = plannedMs ?? ownStepMs;
    const readings = counterReadings(rows, plannedMs, ownStepMs, context);
    return { readings, stepMs: context.silence.rule === "missing" ? stepMs : undefined };
  }
  const stepMs = plannedMs ?? ownStepMs;
  if (stepMs === undefined) {
    context.counts.stepUnknown += rows.epochMs.length;
    tellRow(
      rows,
      rows.epochMs.length - 1,
      context,
      "gauges with a single stamp",
      "has one stamp only, so the time that its reading covers is not known: left out",
      "give stepMinutes",
    );
    return { readings: new ReadingList(), stepMs: undefined };
  }
  if (
    plannedMs !== undefined &&
    ownStepMs !== undefined &&
    (ownStepMs < plannedMs || (ownStepMs > plannedMs && context.silence.rule === "missing"))
  ) {
    tellRow(
      rows,
      0,
      context,
      "gauges whose stamps are not stepMinutes apart",
      `has stamps ${ownStepMs / MINUTE_MS} minutes apart where stepMinutes is ${context.spec.stepMinutes}`,
      "check stepMinutes and kind",
    );
  }
  return { readings: stepReadings(rows, stepMs, context), stepMs };
}

/**
 * Increments and intensities: each reading covers a step, or less where the one before ended within it.
 *
 * A reading that the network marks as accumulated covers the time since the gauge's last value instead. Days
 * are counted on the clock of the stamps, so that one on which the clock changes has 23 or 25 hours.
 */
function stepReadings(rows: GaugeRows, stepMs: number, context: ReadingContext): ReadingList {
  const { spec, counts } = context;
  const readings = new ReadingList();
  const count = rows.epochMs.length;
  const isRate = spec.kind === "intensity";
  for (let index = 0; index < count; index++) {
    const stamp = rows.epochMs[index];
    let start = spec.stamp === "end" ? stepAway(stamp, -stepMs, context) : stamp;
    let end = spec.stamp === "end" ? stamp : stepAway(stamp, stepMs, context);
    const fullMs = end - start;
    let value = rows.values[index];
    const accumulated = (rows.quality[index] & ACCUMULATED) !== 0 && !isRate && !Number.isNaN(value);
    if (accumulated) {
      readings.dropMissingTail();
      counts.accumulated += 1;
      if (readings.length === 0) {
        tellRow(
          rows,
          index,
          context,
          "accumulated readings without a value before",
          "accumulates since a time that the files do not reach back to: not observed",
          "add the file before",
        );
        value = Number.NaN;
      } else start = Math.min(readings.lastEndEpochMs, end);
    }
    if (spec.stamp === "end" && start < readings.lastEndEpochMs) start = readings.lastEndEpochMs;
    if (spec.stamp === "start" && index + 1 < count && end > rows.epochMs[index + 1]) {
      end = rows.epochMs[index + 1];
    }
    if (!accumulated && end - start < fullMs) counts.overlapping += 1;
    const minutes = isRate ? 60 : (end - start) / MINUTE_MS;
    const possible = refuseImpossible(value, MAX_MM_PER_MINUTE * minutes, rows, index, context);
    readings.add(
      start,
      end,
      isRate ? (possible * (end - start)) / HOUR_MS : possible,
      rows.quality[index] & ~ACCUMULATED,
    );
  }
  return readings;
}

/** Times whose differences are steps: those of days as the clock showed them. */
function stepTimes(epochMs: Float64Array, { spec, clock }: ReadingContext): Float64Array {
  if (spec.dayHour === undefined) return epochMs;
  return epochMs.map((time) => time + clock.offsetMinutesAt(time) * MINUTE_MS);
}

/** A step later or earlier; a day on the clock of the stamps where these are dates. */
function stepAway(stamp: number, byMs: number, { spec, clock }: ReadingContext): number {
  if (spec.dayHour === undefined || Math.abs(byMs) !== DAY_MS) return stamp + byMs;
  const clockMs = stamp + clock.offsetMinutesAt(stamp) * MINUTE_MS;
  clock.resolve(clockMs + byMs);
  return clock.earlierMs;
}

/**
 * Tips: each row is a reading of 1 ms that ends at the stamp, so that one stamped on a border belongs to the
 * interval ending there. A row that cannot be read says that something came, not how much: the time
 * since the row before is then not observed.
 */
function tipReadings(rows: GaugeRows, context: ReadingContext): ReadingList {
  const readings = new ReadingList();
  for (let index = 0; index < rows.epochMs.length; index++) {
    const end = rows.epochMs[index];
    const depth = refuseImpossible(rows.values[index], MAX_MM_PER_MINUTE, rows, index, context);
    const unknown = Number.isNaN(depth) && index > 0;
    readings.add(
      unknown ? readings.lastEndEpochMs : end - TIP_MS,
      end,
      depth,
      rows.quality[index] & ~ACCUMULATED,
    );
  }
  return readings;
}

/**
 * Counters: each increment covers the time since the level that it is counted from. Where the counter
 * reports on change, it belongs to the last step before the stamp instead, or to the instant.
 */
function counterReadings(
  rows: GaugeRows,
  plannedMs: number | undefined,
  ownStepMs: number | undefined,
  context: ReadingContext,
): ReadingList {
  const { spec, silence, counts } = context;
  const jitterMm = spec.counterJitterMm ?? DEFAULT_JITTER_MM;
  const levels = Float64Array.from(rows.values, (level, index) => {
    if ((rows.quality[index] & ~ACCUMULATED) === QUALITY_DROP) return Number.NaN;
    return level >= -jitterMm || Number.isNaN(level)
      ? level
      : refuseImpossible(level, Number.POSITIVE_INFINITY, rows, index, context);
  });
  const { incrementMm, outcomes } = counterIncrements(levels, rows.epochMs, {
    jitterMm,
    rollsOverAtMm:
      spec.counterRollsOverAt === undefined ? undefined : spec.counterRollsOverAt * mmPerUnit(spec),
    maxMmPerMinute: MAX_MM_PER_MINUTE,
  });
  const promptMs = longestSilenceMs(silence);
  const readings = new ReadingList();
  let from = -1;
  for (let index = 0; index < levels.length; index++) {
    const outcome = outcomes[index];
    tellOutcome(outcome, levels[index], rows, index, context);
    if (outcome === "missing" || outcome === "outlier") continue;
    if (from >= 0) {
      const since = rows.epochMs[from];
      const end = rows.epochMs[index];
      const passedOver = index - from > 1;
      const reportedOnChange = !passedOver && end - since <= promptMs;
      const start = reportedOnChange ? Math.max(since, end - (plannedMs ?? TIP_MS)) : since;
      const longest = 1.5 * (plannedMs ?? ownStepMs ?? Number.POSITIVE_INFINITY);
      if (!reportedOnChange && (passedOver || end - since > longest)) counts.counterGapTotals += 1;
      let quality = Math.max(rows.quality[index] & ~ACCUMULATED, rows.quality[from] & ~ACCUMULATED);
      if (outcome === "doubtful-reset") quality = Math.max(quality, QUALITY_DOUBT);
      readings.add(start, end, incrementMm[index], quality);
    }
    from = index;
  }
  return readings;
}

const COUNT_OF_OUTCOME: Partial<Record<CounterOutcome, keyof GaugeFileCounts>> = {
  jitter: "counterJitter",
  rollover: "counterRollovers",
  reset: "counterResets",
  "doubtful-reset": "counterResets",
  outlier: "counterOutliers",
  impossible: "impossible",
};

/** Outcomes that a person should look at: kind, what happened to a level of so many mm, what to do. */
const TELL_OF_OUTCOME: Partial<Record<CounterOutcome, readonly [string, (mm: string) => string, string]>> = {
  reset: [
    "resets of a counter",
    (mm) => `starts again at ${mm} mm: that much is counted, a lower bound`,
    "nothing to do if the counter was reset",
  ],
  "doubtful-reset": [
    "resets of a counter",
    (mm) => `falls to ${mm} mm: that much is counted as after a reset, and marked doubtful`,
    "check the counter, or give the reading as missing",
  ],
  outlier: [
    "outliers of a counter",
    (mm) => `reads ${mm} mm, which the next reading does not bear out: left out`,
    "check the counter",
  ],
  impossible: [
    "readings that cannot be",
    (mm) => `moves to ${mm} mm, more than ${MAX_MM_PER_MINUTE} mm in a minute: not observed`,
    "check the counter and the unit",
  ],
};

function tellOutcome(
  outcome: CounterOutcome,
  levelMm: number,
  rows: GaugeRows,
  index: number,
  context: ReadingContext,
): void {
  const count = COUNT_OF_OUTCOME[outcome];
  if (count !== undefined) context.counts[count] += 1;
  const tell = TELL_OF_OUTCOME[outcome];
  if (tell === undefined) return;
  const [kind, what, fix] = tell;
  tellRow(rows, index, context, kind, what(tidy(levelMm)), fix);
}

/** For how long no row means no rain. */
function longestSilenceMs(silence: Silence): number {
  if (silence.rule === "heartbeat") return silence.heartbeatMs;
  return silence.rule === "dry" ? Number.POSITIVE_INFINITY : 0;
}

/** The value, or NaN where it is negative or above the limit, which is then told and counted. */
function refuseImpossible(
  value: number,
  limit: number,
  rows: GaugeRows,
  index: number,
  context: ReadingContext,
): number {
  if (Number.isNaN(value) || (value >= 0 && value <= limit)) return value;
  context.counts.impossible += 1;
  const unit = context.spec.kind === "intensity" ? "mm/h" : "mm";
  tellRow(
    rows,
    index,
    context,
    "readings that cannot be",
    value < 0
      ? `reads ${tidy(value)} ${unit}: rain is never negative`
      : `reads ${tidy(value)} ${unit}, more than ${MAX_MM_PER_MINUTE} mm in a minute`,
    "check unit and kind, or list the value under missing",
  );
  return Number.NaN;
}

function tidy(value: number): string {
  return String(Number(value.toPrecision(6)));
}

function tellRow(
  rows: GaugeRows,
  index: number,
  context: ReadingContext,
  kind: string,
  what: string,
  fix: string,
): void {
  const path = rows.paths[rows.pathIndex[index]];
  context.notices.tell(kind, `gauge "${displayText(rows.id, 60)}" ${what}`, path, [rows.line[index]], fix);
}
