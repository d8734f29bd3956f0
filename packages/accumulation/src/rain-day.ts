import type { Interval } from "@rainreckon/core";
import { DateTime, FixedOffsetZone, IANAZone, type Zone } from "luxon";

/** When a network's rain day begins and which date it bears. Always asked for, never assumed. */
export interface RainDayRule {
  readonly hour: number;
  /** "UTC", a fixed offset like "UTC+01:00", or an IANA zone. */
  readonly zone: string;
  /** follow: the zone's clock changes count, so a day may have 23 or 25 h; never: its standard time all year. */
  readonly dst: "follow" | "never";
  /** Whether a day bears the date on which it starts or on which it ends. */
  readonly label: "start" | "end";
}

export interface RainDay extends Interval {
  /** The date the day bears, yyyy-mm-dd. */
  readonly date: string;
}

/**
 * The clock of a zone; with `dst` "never" its standard time all year round.
 * Standard time is the lower of the offsets on 1 January and 1 July of the year asked about.
 *
 * @throws RangeError for a zone that does not exist
 */
export function clockZone(zone: string, dst: "follow" | "never", year: number): Zone {
  const probe = DateTime.utc(year, 1, 1).setZone(zone);
  if (!probe.isValid) throw new RangeError(`no such time zone: "${zone}"`);
  if (dst === "follow" || !(probe.zone instanceof IANAZone)) return probe.zone;
  const summer = DateTime.utc(year, 7, 1).setZone(zone);
  return FixedOffsetZone.instance(Math.min(probe.offset, summer.offset));
}

/**
 * Every rain day that has a part in the window, whole: the first and the last may reach beyond it.
 *
 * @throws RangeError for a zone that does not exist
 */
export function rainDays(window: Interval, rule: RainDayRule): RainDay[] {
  const clock = clockZone(
    rule.zone,
    rule.dst,
    DateTime.fromMillis(window.startEpochMs, { zone: "utc" }).year,
  );
  const borderOn = (day: DateTime) => day.set({ hour: rule.hour, minute: 0, second: 0, millisecond: 0 });
  let day = DateTime.fromMillis(window.startEpochMs, { zone: clock }).startOf("day").minus({ days: 1 });
  const days: RainDay[] = [];
  while (borderOn(day).toMillis() < window.endEpochMs) {
    const next = day.plus({ days: 1 });
    const start = borderOn(day).toMillis();
    const end = borderOn(next).toMillis();
    if (end > window.startEpochMs) {
      const date = (rule.label === "start" ? day : next).toISODate() as string;
      days.push({ startEpochMs: start, endEpochMs: end, date });
    }
    day = next;
  }
  return days;
}
