import type { Interval } from "@rainreckon/core";
import { DateTime } from "luxon";

/**
 * An instant on the clock of a zone, in English whatever the machine speaks.
 *
 * @param zone - "UTC", a fixed offset like "UTC+01:00", or an IANA zone
 * @throws RangeError for an instant or a zone that does not exist
 */
export function zoned(epochMs: number, zone: string): DateTime {
  const time = DateTime.fromMillis(epochMs, { zone, locale: "en" });
  if (!time.isValid) throw new RangeError(`no such time: ${epochMs} in zone ${zone}`);
  return time;
}

/** "UTC+1", "UTC−3:30", "UTC". */
export function offsetText(time: DateTime): string {
  if (time.offset === 0) return "UTC";
  const minutes = Math.abs(time.offset);
  const rest = minutes % 60 === 0 ? "" : `:${String(minutes % 60).padStart(2, "0")}`;
  return `UTC${time.offset < 0 ? "\u2212" : "+"}${Math.floor(minutes / 60)}${rest}`;
}

/** No-break spaces hold a date together. */
const DATE_AND_TIME = "d\u00a0LLLL\u00a0yyyy HH:mm";

function span(start: DateTime, end: DateTime): string {
  const to = start.hasSame(end, "day") ? end.toFormat("HH:mm") : end.toFormat(DATE_AND_TIME);
  return `${start.toFormat(DATE_AND_TIME)} to ${to}`;
}

/** A window in words: on the local clock with its zone and offset, and in UTC. */
export interface WindowWords {
  readonly local: string;
  readonly zone: string;
  readonly utc: string;
  /** True where local time is UTC, so that saying both would say it twice. */
  readonly localIsUtc: boolean;
}

/** The words for a window; where the clock changes within it, both offsets are named. */
export function windowWords(window: Interval, zone: string): WindowWords {
  const start = zoned(window.startEpochMs, zone);
  const end = zoned(window.endEpochMs, zone);
  const localIsUtc = start.offset === 0 && end.offset === 0 && /^(utc|etc\/utc)$/i.test(zone);
  const offsets =
    start.offset === end.offset ? offsetText(start) : `${offsetText(start)}, then ${offsetText(end)}`;
  const utcStart = start.toUTC();
  const utcEnd = end.toUTC();
  // On the same one day as the local clock the date is not said twice.
  const isOneDay = [end, utcStart, utcEnd].every((time) => time.toISODate() === start.toISODate());
  const zoneName = /^utc/i.test(zone) ? offsets : `${zone}, ${offsets}`;
  return {
    local: span(start, end),
    zone: zoneName,
    utc:
      isOneDay && !localIsUtc
        ? `${utcStart.toFormat("HH:mm")} to ${utcEnd.toFormat("HH:mm")}`
        : span(utcStart, utcEnd),
    localIsUtc,
  };
}

/** A mark on a time axis. */
export interface TimeTick {
  readonly epochMs: number;
  readonly local: string;
  readonly utc: string;
}

const STEP_MINUTES = [5, 10, 15, 30, 60, 120, 180, 360, 720, 1440, 2880, 7200, 14400];

/**
 * Round times on the local clock, at most `most` of them, with their UTC beside them.
 *
 * Midnights carry the date. Where the clock changes the marks stay on round local hours.
 */
export function timeTicks(window: Interval, zone: string, most: number): TimeTick[] {
  const spanMinutes = (window.endEpochMs - window.startEpochMs) / 60_000;
  const step = STEP_MINUTES.find((minutes) => spanMinutes / minutes <= most) ?? Math.ceil(spanMinutes / most);
  const ticks: TimeTick[] = [];
  // Quarters of an hour (or the step, where it is finer) hold every round local time of every zone in use.
  const fine = Math.min(step, 15) * 60_000;
  for (let t = Math.ceil(window.startEpochMs / fine) * fine; t <= window.endEpochMs; t += fine) {
    const local = zoned(t, zone);
    const minuteOfDay = local.hour * 60 + local.minute;
    const dayIsMarked = step <= 1440 || Math.floor(local.toSeconds() / 86_400) % (step / 1440) === 0;
    if (minuteOfDay % Math.min(step, 1440) !== 0 || !dayIsMarked) continue;
    ticks.push({
      epochMs: t,
      local: minuteOfDay === 0 ? local.toFormat("d LLL") : local.toFormat("HH:mm"),
      utc: local.toUTC().toFormat("HH:mm"),
    });
  }
  return ticks;
}
