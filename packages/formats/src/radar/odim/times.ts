const MINUTE_MS = 60_000;
const EARLIEST_YEAR = 1950;
const LATEST_YEAR = 2199;

/**
 * An instant from ODIM's date "YYYYMMDD" and time "HHmmss", both UTC; a fraction of a second is kept.
 *
 * @returns epoch milliseconds; undefined where it is no such instant, or before 1950 or after 2199
 */
export function odimEpochMs(date: string, time: string): number | undefined {
  const day = /^(\d{4})(\d\d)(\d\d)$/.exec(date);
  const clock = /^(\d\d)(\d\d)(\d\d)(\.\d+)?$/.exec(time);
  if (day === null || clock === null) return undefined;
  const [year, month, dayOfMonth] = [Number(day[1]), Number(day[2]), Number(day[3])];
  const [hour, minute, second] = [Number(clock[1]), Number(clock[2]), Number(clock[3])];
  if (year < EARLIEST_YEAR || year > LATEST_YEAR) return undefined;
  // 60 is a leap second; it becomes the first second of the next minute, as in POSIX time.
  if (hour > 23 || minute > 59 || second > 60) return undefined;
  const midnightEpochMs = Date.UTC(year, month - 1, dayOfMonth);
  if (new Date(midnightEpochMs).getUTCDate() !== dayOfMonth || month < 1 || month > 12) return undefined;
  const fractionMs = clock[4] === undefined ? 0 : Number(clock[4]) * 1000;
  return midnightEpochMs + (hour * 60 + minute) * MINUTE_MS + second * 1000 + fractionMs;
}
