const UNIT_MS: readonly (readonly [pattern: RegExp, ms: number])[] = [
  [/^(ms|msecs?|milliseconds?)$/i, 1],
  [/^(s|secs?|seconds?)$/i, 1000],
  [/^(min|mins|minutes?)$/i, 60_000],
  [/^(h|hrs?|hours?)$/i, 3_600_000],
  [/^(d|days?)$/i, 86_400_000],
];

/** How numbers become instants: epoch milliseconds = value * `stepMs` + `originEpochMs`. */
export interface CfTimeUnits {
  readonly stepMs: number;
  readonly originEpochMs: number;
}

/**
 * Reads CF time units such as "seconds since 2023-08-01T20:00:00Z" or "hours since 1970-1-1 0:00:00 +1:00".
 *
 * Calendars other than the one we live by are for climate models and are not read; from 1900 on, "standard",
 * "gregorian" and "proleptic_gregorian" are the same.
 *
 * @returns undefined where these are no such units, or the calendar is another
 * @see CF Conventions 1.11 (2023), section 4.4, "Time Coordinate"
 */
export function cfTimeUnits(units: string, calendar: string | undefined): CfTimeUnits | undefined {
  if (calendar !== undefined && !/^(standard|gregorian|proleptic_gregorian|)$/i.test(calendar.trim())) {
    return undefined;
  }
  const parts = /^\s*(\w+)\s+since\s+(.+?)\s*$/i.exec(units.slice(0, 200));
  const stepMs = UNIT_MS.find(([pattern]) => pattern.test(parts?.[1] ?? ""))?.[1];
  const originEpochMs = parts === null ? undefined : instant(parts[2] as string);
  return stepMs === undefined || originEpochMs === undefined ? undefined : { stepMs, originEpochMs };
}

function instant(text: string): number | undefined {
  const match =
    /^(\d{4})-(\d{1,2})-(\d{1,2})(?:[T\s]+(\d{1,2}):(\d{1,2})(?::(\d{1,2})(\.\d+)?)?)?\s*(Z|UTC|GMT|[+-]?\d{1,2}:?\d{2}|)?$/i.exec(
      text,
    );
  if (match === null) return undefined;
  const [year, month, day] = [Number(match[1]), Number(match[2]), Number(match[3])];
  const [hour, minute, second] = [Number(match[4] ?? 0), Number(match[5] ?? 0), Number(match[6] ?? 0)];
  if (year < 1900 || year > 2199 || hour > 23 || minute > 59 || second > 60) return undefined;
  const midnight = Date.UTC(year, month - 1, day);
  if (month < 1 || month > 12 || new Date(midnight).getUTCDate() !== day) return undefined;
  const fractionMs = Number(match[7] ?? 0) * 1000;
  const offset = /^([+-]?)(\d{1,2}):?(\d{2})$/.exec(match[8] ?? "");
  const offsetMinutes =
    offset === null ? 0 : (offset[1] === "-" ? -1 : 1) * (Number(offset[2]) * 60 + Number(offset[3]));
  return midnight + ((hour * 60 + minute - offsetMinutes) * 60 + second) * 1000 + fractionMs;
}
