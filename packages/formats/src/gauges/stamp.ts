const ZERO = 48;
const DASH = 45;
const COLON = 58;
const DAYS_IN_MONTH = [31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31];

/** Years outside this span are taken for slips of the pen. */
const FIRST_YEAR = 1800;
const LAST_YEAR = 2299;

/** How the dates of a file are written; "serial-1900" are the day numbers of spreadsheets, 1900 system. */
export type DateForm = "ymd" | "dmy" | "mdy" | "serial-1900";

export interface StampRules {
  readonly dates?: DateForm;
  /** Hour at which days begin, for stamps without a time of day; these are refused where it is left out. */
  readonly dayHour?: number | undefined;
  /** Take a stamp within 10 ms of a whole minute for that minute, which some loggers and databases miss. */
  readonly snapToMinute?: boolean;
}

/** Databases that keep time in steps of 1/300 s write 59.997 for a whole minute. */
const SNAP_MS = 10;
const MINUTE_MS = 60_000;
const DAY_MS = 86_400_000;
/** Day number of 1 January 1970 in the 1900 system (ISO/IEC 29500-1, 18.17.4.1). */
const SERIAL_OF_1970 = 25_569;
/** The 1900 system has a 29 February 1900, which never was; from 1 March on its numbers are right. */
const FIRST_SAFE_SERIAL = 61;

const YEAR_FIRST = /^(\d{4})(?:([-/.])(\d{1,2})\2(\d{1,2})|(\d{2})(\d{2}))(?=$|[T ,_]|\d{4})/i;
const YEAR_LAST = /^(\d{1,2})([-/.])(\d{1,2})\2(\d{4})(?=$|[T ,_])/i;
const TIME =
  /^[T ,_]?\s*(?:(\d{1,2})[:.](\d{2})(?:[:.](\d{2})(?:[.,](\d+))?)?|(\d{2})(\d{2})(\d{2})?(?!\d))(?:\s*([ap])\.?m\.?)?/i;
const SERIAL = /^(\d{1,6})(?:[.,](\d{1,17}))?$/;

/**
 * Reads time stamps in a row loop without making objects, as long as they are ISO 8601.
 *
 * Understands a date in the order that the rules name (year first in any case for "ymd"), parted by `-`, `/`
 * or `.` or by nothing; a T or a blank; hours and minutes, seconds and their fraction where given, am or pm,
 * `24:00` for the end of a day; and at the end `Z`, `UTC`, `GMT` or an offset (`+01:00`, `+0100`, `+01`).
 * Forms in which day and month could be mistaken for each other are refused under "ymd", never guessed.
 */
export class StampScanner {
  /** What the clock on the wall showed, as if it were UTC, in epoch milliseconds. */
  clockMs = Number.NaN;
  /** The offset that the stamp itself carries, minutes east of UTC; NaN where it carries none. */
  offsetMinutes = Number.NaN;
  /** Whether the last stamp was moved to the minute that it just missed. */
  snapped = false;
  /** Whether the last stamp was a date without a time of day. */
  dateOnly = false;
  /** Why the last stamp could not be read. */
  problem = "";

  readonly #rules: StampRules;
  #lastText: string | undefined;
  #lastRead = false;

  constructor(rules: StampRules = {}) {
    this.#rules = rules;
  }

  /** Reads one stamp. @returns false where it cannot be read; `problem` then says why */
  scan(text: string): boolean {
    // Many gauges share a stamp in long files.
    if (text === this.#lastText) return this.#lastRead;
    this.#lastText = text;
    this.clockMs = Number.NaN;
    this.offsetMinutes = Number.NaN;
    this.snapped = false;
    this.dateOnly = false;
    this.problem = "";
    this.#lastRead = this.#scan(text.trim());
    if (this.#lastRead && this.#rules.snapToMinute === true) this.#snap();
    return this.#lastRead;
  }

  #scan(text: string): boolean {
    const { dates = "ymd" } = this.#rules;
    if (dates === "serial-1900") return this.#scanSerial(text);
    if (dates !== "ymd") return this.#scanParted(text);
    const year = digits(text, 0, 4);
    const month = digits(text, 5, 2);
    const day = digits(text, 8, 2);
    const hour = digits(text, 11, 2);
    const minute = digits(text, 14, 2);
    const separator = text[10];
    const iso =
      !Number.isNaN(year + month + day + hour + minute) &&
      text.charCodeAt(4) === DASH &&
      text.charCodeAt(7) === DASH &&
      text.charCodeAt(13) === COLON &&
      (separator === "T" || separator === "t" || separator === " ");
    if (!iso) return this.#scanParted(text);
    let at = 16;
    let second = 0;
    let fractionMs = 0;
    if (text.charCodeAt(at) === COLON) {
      second = digits(text, at + 1, 2);
      at += 3;
      if (text[at] === "." || text[at] === ",") {
        const end = endOfDigits(text, at + 1);
        if (end === at + 1) return this.#refuse(whyNotIso(text));
        fractionMs = milliseconds(text.slice(at + 1, end));
        at = end;
      }
    }
    return (
      this.#settle(year, month, day, hour, minute, second, fractionMs) && this.#scanOffset(text, text, at)
    );
  }

  /** Any other order, separator or width than that of ISO 8601. */
  #scanParted(text: string): boolean {
    const { dates = "ymd", dayHour } = this.#rules;
    const date = (dates === "ymd" ? YEAR_FIRST : YEAR_LAST).exec(text);
    if (date === null) {
      return this.#refuse(
        dates === "ymd"
          ? whyNotIso(text)
          : `not a time like ${dates === "dmy" ? "27.05.2031" : "05/27/2031"} 12:05`,
      );
    }
    const [first, second] = dates === "ymd" ? [date[3] ?? date[5], date[4] ?? date[6]] : [date[1], date[3]];
    const year = Number(dates === "ymd" ? date[1] : date[4]);
    const month = Number(dates === "dmy" ? second : first);
    const day = Number(dates === "dmy" ? first : second);
    const rest = text.slice(date[0].length);
    if (rest.trim() === "") {
      this.dateOnly = true;
      if (dayHour === undefined) return this.#refuse("no time of day");
      return this.#settle(year, month, day, dayHour, 0, 0, 0);
    }
    const time = TIME.exec(rest);
    if (time === null) return this.#refuse(whyNotIso(text));
    let hour = Number(time[1] ?? time[5]);
    const half = time[8]?.toLowerCase();
    if (half !== undefined) {
      if (hour < 1 || hour > 12) return this.#refuse("no such date or time of day");
      hour = (hour % 12) + (half === "p" ? 12 : 0);
    }
    const fractionMs = time[4] === undefined ? 0 : milliseconds(time[4]);
    return (
      this.#settle(
        year,
        month,
        day,
        hour,
        Number(time[2] ?? time[6]),
        Number(time[3] ?? time[7] ?? 0),
        fractionMs,
      ) && this.#scanOffset(text, rest, time[0].length)
    );
  }

  /** A day number; one written with few digits is the whole minute that it may stand for. */
  #scanSerial(text: string): boolean {
    const parts = SERIAL.exec(text);
    if (parts === null) return this.#refuse("not a day number of a spreadsheet, like 47971.503472");
    const serial = Number(text.replace(",", "."));
    const year = new Date((serial - SERIAL_OF_1970) * DAY_MS).getUTCFullYear();
    if (serial < FIRST_SAFE_SERIAL || year > LAST_YEAR) {
      return this.#refuse(`the day number ${text} cannot be meant`);
    }
    if (parts[2] === undefined) {
      this.dateOnly = true;
      const { dayHour } = this.#rules;
      if (dayHour === undefined) return this.#refuse("no time of day");
      this.clockMs = (serial - SERIAL_OF_1970) * DAY_MS + dayHour * 60 * MINUTE_MS;
      return true;
    }
    const exactMs = (serial - SERIAL_OF_1970) * DAY_MS;
    const roundingMs = Math.min(0.5 * 10 ** -parts[2].length * DAY_MS, MINUTE_MS / 2) + 1;
    const wholeMinuteMs = Math.round(exactMs / MINUTE_MS) * MINUTE_MS;
    this.clockMs =
      Math.abs(exactMs - wholeMinuteMs) <= roundingMs ? wholeMinuteMs : Math.round(exactMs / 1000) * 1000;
    return true;
  }

  #settle(
    year: number,
    month: number,
    day: number,
    hour: number,
    minute: number,
    second: number,
    fractionMs: number,
  ): boolean {
    const leap = (year % 4 === 0 && year % 100 !== 0) || year % 400 === 0;
    const lastDay = month === 2 && leap ? 29 : DAYS_IN_MONTH[month - 1];
    const endOfDay = hour === 24 && minute === 0 && second === 0 && fractionMs === 0;
    const real =
      month >= 1 &&
      month <= 12 &&
      day >= 1 &&
      day <= lastDay &&
      (hour <= 23 || endOfDay) &&
      minute <= 59 &&
      second <= 59;
    if (!real) return this.#refuse("no such date or time of day");
    if (year < FIRST_YEAR || year > LAST_YEAR) return this.#refuse(`the year ${year} cannot be meant`);
    this.clockMs = Date.UTC(year, month - 1, day, hour, minute, second) + fractionMs;
    return true;
  }

  #scanOffset(whole: string, text: string, from: number): boolean {
    if (from === text.length) return true;
    const rest = text.slice(from).trim();
    if (rest === "Z" || rest === "z" || rest === "UTC" || rest === "GMT") {
      this.offsetMinutes = 0;
      return true;
    }
    const parts = /^([+-])(\d{2}):?(\d{2})?$/.exec(rest);
    const minutes = parts === null ? Number.NaN : Number(parts[2]) * 60 + Number(parts[3] ?? 0);
    if (!(minutes <= 18 * 60)) {
      this.clockMs = Number.NaN;
      return this.#refuse(whyNotIso(whole));
    }
    this.offsetMinutes = parts?.[1] === "-" ? -minutes : minutes;
    return true;
  }

  #snap(): void {
    const minuteMs = Math.round(this.clockMs / MINUTE_MS) * MINUTE_MS;
    if (this.clockMs === minuteMs || Math.abs(this.clockMs - minuteMs) > SNAP_MS) return;
    this.clockMs = minuteMs;
    this.snapped = true;
  }

  #refuse(problem: string): false {
    this.problem = problem;
    return false;
  }
}

/** What a column of dates says of the order of day and month. */
export interface DateOrderEvidence {
  /** Undefined where nothing decides it, or days above 12 stand in both places. */
  readonly order: "dmy" | "mdy" | undefined;
  readonly reason: string;
}

/**
 * The order of day and month in dates that end in the year: decided by a number above 12, never guessed.
 *
 * @returns undefined where the cells hold no such dates
 */
export function decideDateOrder(cells: readonly string[]): DateOrderEvidence | undefined {
  let dates = 0;
  let dayFirst: string | undefined;
  let monthFirst: string | undefined;
  for (const cell of cells) {
    const parts = /^\s*(\d{1,2})[./-](\d{1,2})[./-]\d{4}/.exec(cell);
    if (parts === null) continue;
    dates += 1;
    if (Number(parts[1]) > 12) dayFirst ??= cell;
    if (Number(parts[2]) > 12) monthFirst ??= cell;
  }
  if (dates === 0) return undefined;
  if (dayFirst !== undefined && monthFirst !== undefined) {
    return { order: undefined, reason: `"${dayFirst}" and "${monthFirst}" contradict each other` };
  }
  if (dayFirst !== undefined) return { order: "dmy", reason: `"${dayFirst}" can only be day, month, year` };
  if (monthFirst !== undefined) {
    return { order: "mdy", reason: `"${monthFirst}" can only be month, day, year` };
  }
  return { order: undefined, reason: "no day above 12 tells day and month apart: ask the network" };
}

/** A cell that begins like a date, in whatever order. */
export const SEEMS_A_STAMP =
  /^\s*(\d{4}[-/.]\d{1,2}[-/.]\d{1,2}|\d{1,2}[-/.]\d{1,2}[-/.]\d{4})(?=$|[T\s,_])/i;

/** Whether the text looks like a date in which day and month could be mistaken for each other. */
export function isAmbiguousDate(text: string): boolean {
  return /^\s*\d{1,2}[./-]\d{1,2}[./-]\d{2,4}/.test(text);
}

function whyNotIso(text: string): string {
  return isAmbiguousDate(text)
    ? "day and month can be mistaken for each other"
    : "not a time like 2031-05-03T12:05";
}

/** The number that `count` digits stand for; NaN where one of them is none. */
function digits(text: string, from: number, count: number): number {
  if (from + count > text.length) return Number.NaN;
  let value = 0;
  for (let at = from; at < from + count; at++) {
    const digit = text.charCodeAt(at) - ZERO;
    if (digit < 0 || digit > 9) return Number.NaN;
    value = value * 10 + digit;
  }
  return value;
}

function endOfDigits(text: string, from: number): number {
  let at = from;
  while (at < text.length && text.charCodeAt(at) >= ZERO && text.charCodeAt(at) < ZERO + 10) at++;
  return at;
}

/** Fraction of a second in whole milliseconds, rounded up: (start, end] then holds the same stamps as before. */
function milliseconds(fraction: string): number {
  const whole = Number(fraction.slice(0, 3).padEnd(3, "0"));
  return /[1-9]/.test(fraction.slice(3)) ? whole + 1 : whole;
}
