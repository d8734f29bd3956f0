import { found, type Guess, guessed } from "./guess.ts";
import { type DateForm, decideDateOrder, StampScanner } from "./stamp.ts";
import { MOST, share } from "./table-sample.ts";

const TIME_WORDS = /time|date|stamp|zeit|datum/i;
const TIME_OF_DAY = /^\d{1,2}[:.]\d{2}([:.]\d{2}([.,]\d+)?)?(\s*[ap]\.?m\.?)?$/i;
/** Day numbers from 1954 to 2119: further off, a number is rather a number. */
const LIKELY_SERIALS = { first: 20_000, last: 80_500 };

/** Where a table's times stand, and how they are written. */
export interface TimesGuess {
  readonly timeAt: number;
  /** Column of dates, where `timeAt` is one of times of day. */
  readonly dateAt?: number;
  readonly dates: Guess<DateForm | "ask">;
  readonly dateOnly: boolean;
}

type Rows = readonly (readonly string[])[];

/** The column of times of a table; undefined where there is none. */
export function findTimes(columns: readonly string[], rows: Rows): TimesGuess | undefined {
  const candidates = columns.flatMap((_, at) => {
    const dates = datesOf(rows, at, columns[at]);
    return dates === undefined ? [] : [{ at, ...dates }];
  });
  // Where there are several, such as a start and an end, the one that says "time" and not "start" is it;
  // one with a time of day before one without.
  const score = ({ at, dateOnly }: (typeof candidates)[number]) =>
    (TIME_WORDS.test(columns[at]) ? 1 : 0) -
    (/start|begin|from/i.test(columns[at]) ? 2 : 0) -
    (dateOnly ? 4 : 0);
  const [best] = candidates.sort((a, b) => score(b) - score(a) || a.at - b.at);
  if (best === undefined) return undefined;
  const { at, dates, dateOnly } = best;
  if (dateOnly) {
    const timeAt = columns.findIndex(
      (_, other) => other !== at && share(rows, other, (cell) => TIME_OF_DAY.test(cell)) >= MOST,
    );
    if (timeAt >= 0) return { timeAt, dateAt: at, dates, dateOnly: false };
  }
  return { timeAt: at, dates, dateOnly };
}

function datesOf(
  rows: Rows,
  at: number,
  header: string,
): { dates: Guess<DateForm | "ask">; dateOnly: boolean } | undefined {
  const cells = rows.map((row) => row[at] ?? "");
  const years = looksLike(rows, at, "ymd");
  // Eight digits may be any number, unless the header speaks of time.
  const bare = share(rows, at, (cell) => /^\d+$/.test(cell)) >= MOST;
  if (years.fits && (!bare || TIME_WORDS.test(header))) {
    return { dates: found("ymd", "dates begin with the year"), dateOnly: years.dateOnly };
  }
  const evidence = decideDateOrder(cells);
  if (evidence !== undefined) {
    const form = evidence.order ?? (looksLike(rows, at, "dmy").fits ? "dmy" : "mdy");
    const { fits, dateOnly } = looksLike(rows, at, form);
    if (!fits) return undefined;
    const dates =
      evidence.order === undefined
        ? guessed("ask" as const, evidence.reason)
        : found(evidence.order, evidence.reason);
    return { dates, dateOnly };
  }
  const serials = share(rows, at, (cell) => {
    const number = /^\d+[.,]\d+$/.test(cell) ? Number(cell.replace(",", ".")) : Number.NaN;
    return number >= LIKELY_SERIALS.first && number <= LIKELY_SERIALS.last;
  });
  if (serials >= MOST && TIME_WORDS.test(header)) {
    return {
      dates: guessed("serial-1900", "numbers under a header of time: days as spreadsheets count them"),
      dateOnly: false,
    };
  }
  return undefined;
}

function looksLike(rows: Rows, at: number, dates: DateForm): { fits: boolean; dateOnly: boolean } {
  const stamps = new StampScanner({ dates, dayHour: 0 });
  const fits = share(rows, at, (cell) => stamps.scan(cell)) >= MOST;
  const dateOnly = fits && share(rows, at, (cell) => stamps.scan(cell) && stamps.dateOnly) >= MOST;
  return { fits, dateOnly };
}
