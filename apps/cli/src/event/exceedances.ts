import { type Frequency, yearsText } from "./frequency-told.ts";
import type { EventReport, PlaceReport } from "./schema.ts";

/**
 * How many places are bound to meet each return period in a year, by chance alone, beside how many met it here. The
 * expected number is places over years whatever the places have to do with each other.
 */
export function exceedancesOf(
  places: readonly PlaceReport[],
  { table, shownAs }: Frequency,
): EventReport["exceedances"] {
  const met = (place: PlaceReport, years: number) =>
    place.maxima.some(
      ({ period }) => period !== null && period.is !== "below" && (period.years ?? 0) >= years,
    );
  const periods = shownAs === table.series ? table.periodsYears : [2, 5, 10, 30, 50, 100];
  const rows = periods
    .filter((years) => years >= 2)
    .map((periodYears) => ({
      periodYears,
      expectedPerYear: places.length / periodYears,
      seen: places.filter((place) => met(place, periodYears)).length,
    }));
  const first = rows.find(({ periodYears }) => periodYears >= 10) ?? rows[rows.length - 1];
  const example =
    first === undefined
      ? ""
      : ` Of ${places.length}, ${yearsText(first.expectedPerYear)} a year meet a depth of ${yearsText(first.periodYears)} years at any one duration;`;
  return {
    placeCount: places.length,
    rows,
    words: `Among many places a rare depth somewhere is no rare thing.${example} looked for at several durations, as here, more do. Rain that meets one place often meets its neighbours, so years differ widely.`,
  };
}
