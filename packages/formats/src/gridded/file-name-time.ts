/** A date and a time of day with nothing but customary marks between, not within a longer run of digits. */
const STAMP =
  /(?<!\d)((?:19|20|21)\d\d)[-_.]?(\d\d)[-_.]?(\d\d)[-_.T ]?(\d\d)[-_.:]?(\d\d)(?:[-_.:]?(\d\d))?(?!\d)/g;

/**
 * The instant, or start and end, in a file's name, taken as UTC: "rate_20310503_1200.tif", "20310503T1200-20310503T1300.nc".
 *
 * @param name - the name without folders
 * @returns undefined for no stamp, for one that is no date, for an end before its start, and for more than two
 */
export function fileNameTime(name: string): { startEpochMs: number; endEpochMs: number } | undefined {
  const instants: number[] = [];
  for (const match of name.slice(0, 300).matchAll(STAMP)) {
    const [year, month, day, hour, minute, second] = match.slice(1, 7).map((part) => Number(part ?? 0));
    const midnight = Date.UTC(year as number, (month as number) - 1, day);
    const isDate =
      new Date(midnight).getUTCDate() === day && (month as number) >= 1 && (month as number) <= 12;
    if (!isDate || (hour as number) > 23 || (minute as number) > 59 || (second as number) > 59)
      return undefined;
    instants.push(midnight + (((hour as number) * 60 + (minute as number)) * 60 + (second as number)) * 1000);
  }
  const [startEpochMs, endEpochMs = startEpochMs] = instants;
  if (startEpochMs === undefined || endEpochMs === undefined || instants.length > 2) return undefined;
  return endEpochMs < startEpochMs ? undefined : { startEpochMs, endEpochMs };
}
