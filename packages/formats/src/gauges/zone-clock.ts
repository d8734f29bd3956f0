import { InputError } from "@rainreckon/core";
import { IANAZone } from "luxon";

const HOUR_MS = 3_600_000;
const DAY_MS = 24 * HOUR_MS;

/** Whether a zone's clock changes count, or its standard time holds all year. */
export type DstRule = "follow" | "never";

/**
 * Turns what a clock on the wall showed into instants.
 *
 * The zone is "UTC", a fixed offset ("UTC+01:00", "+01:00"), or an IANA zone. With `dst` "never" an IANA
 * zone keeps its standard time all year: the smaller of its offsets on 1 January and 1 July of that year,
 * whatever name the zone's law gives to it.
 */
export class ZoneClock {
  /** Earlier and later of the instants that the last clock time may stand for; equal where there is one. */
  earlierMs = Number.NaN;
  laterMs = Number.NaN;

  readonly #offsetMinutesAt: (epochMs: number) => number;
  readonly #fixedOffsetMinutes: number;
  /** By hour of the wall clock: the offset all through it, or NaN where it has to be worked out. */
  readonly #offsetOfHour = new Map<number, number>();

  /** @throws InputError (usage) where the zone is none */
  constructor(zone: string, dst: DstRule) {
    const fixed = fixedOffsetMinutes(zone);
    this.#fixedOffsetMinutes = fixed;
    if (!Number.isNaN(fixed)) {
      this.#offsetMinutesAt = () => fixed;
      return;
    }
    if (!IANAZone.isValidZone(zone)) {
      throw new InputError(
        `"${zone}" is no time zone`,
        "zone",
        'write "UTC", a fixed offset like "UTC+01:00", or an IANA zone like "Europe/Zurich"',
        { kind: "usage" },
      );
    }
    const iana = IANAZone.create(zone);
    this.#offsetMinutesAt =
      dst === "follow"
        ? (epochMs) => iana.offset(epochMs)
        : standardOffset((epochMs) => iana.offset(epochMs));
  }

  /** Minutes east of UTC that this clock is ahead at an instant. */
  offsetMinutesAt(epochMs: number): number {
    return this.#offsetMinutesAt(epochMs);
  }

  /**
   * How many instants a wall-clock time stands for: 1 usually, 2 in an hour that is repeated, 0 in one that
   * is skipped. `earlierMs` and `laterMs` hold them; of a skipped time, the two that it could have been
   * meant for.
   *
   * @param clockMs - the wall clock as if it were UTC, epoch milliseconds
   */
  resolve(clockMs: number): 0 | 1 | 2 {
    if (!Number.isNaN(this.#fixedOffsetMinutes)) {
      return this.#one(clockMs, this.#fixedOffsetMinutes);
    }
    const hour = Math.floor(clockMs / HOUR_MS);
    let offset = this.#offsetOfHour.get(hour);
    if (offset === undefined) {
      // No zone changes there and back within an hour: equal at both ends is equal all through.
      const atStart = this.#work(hour * HOUR_MS) === 1 ? clockOffset(hour * HOUR_MS, this) : Number.NaN;
      const lastMs = (hour + 1) * HOUR_MS - 1;
      const atEnd = this.#work(lastMs) === 1 ? clockOffset(lastMs, this) : Number.NaN;
      offset = atStart === atEnd ? atStart : Number.NaN;
      this.#offsetOfHour.set(hour, offset);
    }
    return Number.isNaN(offset) ? this.#work(clockMs) : this.#one(clockMs, offset);
  }

  #one(clockMs: number, offsetMinutes: number): 1 {
    this.earlierMs = clockMs - offsetMinutes * 60_000;
    this.laterMs = this.earlierMs;
    return 1;
  }

  #work(clockMs: number): 0 | 1 | 2 {
    // A day before and after lie on either side of any change near this time.
    const before = this.#offsetMinutesAt(clockMs - DAY_MS);
    const after = this.#offsetMinutesAt(clockMs + DAY_MS);
    this.earlierMs = clockMs - Math.max(before, after) * 60_000;
    this.laterMs = clockMs - Math.min(before, after) * 60_000;
    const beforeHolds = this.#offsetMinutesAt(clockMs - before * 60_000) === before;
    const afterHolds = this.#offsetMinutesAt(clockMs - after * 60_000) === after;
    if (beforeHolds && afterHolds) return before === after ? 1 : 2;
    if (!beforeHolds && !afterHolds) return 0;
    return this.#one(clockMs, beforeHolds ? before : after);
  }
}

function clockOffset(clockMs: number, clock: ZoneClock): number {
  return (clockMs - clock.earlierMs) / 60_000;
}

/** Minutes east of UTC of "UTC", "Z", "UTC+01:00", "+0530"; NaN where the text names no fixed offset. */
function fixedOffsetMinutes(zone: string): number {
  if (zone === "UTC" || zone === "Z") return 0;
  const parts = /^(?:UTC)?([+-])(\d{1,2})(?::?(\d{2}))?$/.exec(zone);
  if (parts === null) return Number.NaN;
  const minutes = Number(parts[2]) * 60 + Number(parts[3] ?? 0);
  if (minutes > 18 * 60) return Number.NaN;
  return parts[1] === "-" ? -minutes : minutes;
}

function standardOffset(offsetMinutesAt: (epochMs: number) => number): (epochMs: number) => number {
  const byYear = new Map<number, number>();
  return (epochMs) => {
    const year = new Date(epochMs).getUTCFullYear();
    let offset = byYear.get(year);
    if (offset === undefined) {
      offset = Math.min(offsetMinutesAt(Date.UTC(year, 0, 1)), offsetMinutesAt(Date.UTC(year, 6, 1)));
      byYear.set(year, offset);
    }
    return offset;
  };
}
