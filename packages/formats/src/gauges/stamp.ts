const ZERO = 48;
const DASH = 45;
const COLON = 58;
const DAYS_IN_MONTH = [31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31];

/** Years outside this span are taken for slips of the pen. */
const FIRST_YEAR = 1800;
const LAST_YEAR = 2299;

/**
 * Reads time stamps in a row loop without making objects.
 *
 * Understands ISO 8601 in the extended form with the date first: `2031-05-03T12:05`, a blank for the T,
 * seconds and their fraction where given, `24:00` for the end of a day, and at the end `Z`, `UTC`, `GMT`
 * or an offset (`+01:00`, `+0100`, `+01`). Forms in which day and month could be mistaken for each
 * other are refused, never guessed.
 */
export class StampScanner {
  /** What the clock on the wall showed, as if it were UTC, in epoch milliseconds. */
  clockMs = Number.NaN;
  /** The offset that the stamp itself carries, minutes east of UTC; NaN where it carries none. */
  offsetMinutes = Number.NaN;
  /** Why the last stamp could not be read. */
  problem = "";

  #lastText: string | undefined;
  #lastRead = false;

  /** Reads one stamp. @returns false where it cannot be read; `problem` then says why */
  scan(text: string): boolean {
    // Many gauges share a stamp in long files.
    if (text === this.#lastText) return this.#lastRead;
    this.#lastText = text;
    this.#lastRead = this.#scan(text.trim());
    return this.#lastRead;
  }

  #scan(text: string): boolean {
    this.clockMs = Number.NaN;
    this.offsetMinutes = Number.NaN;
    this.problem = "";
    const year = digits(text, 0, 4);
    const month = digits(text, 5, 2);
    const day = digits(text, 8, 2);
    if (Number.isNaN(year + month + day) || text.charCodeAt(4) !== DASH || text.charCodeAt(7) !== DASH) {
      return this.#refuse(whyNotIso(text));
    }
    if (text.length === 10) return this.#refuse("no time of day");
    const hour = digits(text, 11, 2);
    const minute = digits(text, 14, 2);
    const separator = text[10];
    if (
      Number.isNaN(hour + minute) ||
      text.charCodeAt(13) !== COLON ||
      !(separator === "T" || separator === "t" || separator === " ")
    ) {
      return this.#refuse(whyNotIso(text));
    }
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
    if (!this.#scanOffset(text, at)) return false;
    this.clockMs = Date.UTC(year, month - 1, day, hour, minute, second) + fractionMs;
    return true;
  }

  #scanOffset(text: string, from: number): boolean {
    if (from === text.length) return true;
    const rest = text.slice(from).trim();
    if (rest === "Z" || rest === "z" || rest === "UTC" || rest === "GMT") {
      this.offsetMinutes = 0;
      return true;
    }
    const parts = /^([+-])(\d{2}):?(\d{2})?$/.exec(rest);
    const minutes = parts === null ? Number.NaN : Number(parts[2]) * 60 + Number(parts[3] ?? 0);
    if (!(minutes <= 18 * 60)) return this.#refuse(whyNotIso(text));
    this.offsetMinutes = parts?.[1] === "-" ? -minutes : minutes;
    return true;
  }

  #refuse(problem: string): false {
    this.problem = problem;
    return false;
  }
}

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
