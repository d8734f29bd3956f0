import type { PageData } from "../data/contract.ts";

const MONTHS = ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"];

/** Instants in words, by the local clock that came with the data: nothing is asked of the browser's own. */
export class Clock {
  readonly #clock: PageData["clock"];
  readonly #isUtc: boolean;

  constructor({ clock, zone }: Pick<PageData, "clock" | "zone">) {
    this.#clock = clock;
    this.#isUtc = zone === "";
  }

  /** Local time as if it were UTC, for its fields. */
  #local(epochMs: number): Date {
    let offset = this.#clock[0]?.[1] ?? 0;
    for (const [from, minutes] of this.#clock) if (epochMs >= from) offset = minutes;
    return new Date(epochMs + offset * 60_000);
  }

  /** "14:05" on the local clock. */
  hour(epochMs: number): string {
    return hourOf(this.#local(epochMs));
  }

  /** "20 May 14:05" on the local clock. */
  dayAndHour(epochMs: number): string {
    return `${dayOf(this.#local(epochMs))} ${this.hour(epochMs)}`;
  }

  utcHour(epochMs: number): string {
    return hourOf(new Date(epochMs));
  }

  utcDayAndHour(epochMs: number): string {
    return `${dayOf(new Date(epochMs))} ${this.utcHour(epochMs)}`;
  }

  /** "20 May 14:00 to 15:00 (12:00 to 13:00 UTC)". */
  span([start, end]: readonly [number, number]): string {
    const sameDay = dayOf(this.#local(start)) === dayOf(this.#local(end));
    const local = `${this.dayAndHour(start)} to ${sameDay ? this.hour(end) : this.dayAndHour(end)}`;
    return this.#isUtc ? `${local} UTC` : `${local} (${this.utcHour(start)} to ${this.utcHour(end)} UTC)`;
  }

  /** "20 May 14:05 (12:05 UTC)". */
  instant(epochMs: number): string {
    const local = this.dayAndHour(epochMs);
    return this.#isUtc ? `${local} UTC` : `${local} (${this.utcHour(epochMs)} UTC)`;
  }

  /** Round local times for an axis: about `most` of them. */
  ticks(startEpochMs: number, endEpochMs: number, most: number): { epochMs: number; label: string }[] {
    const minutes = (endEpochMs - startEpochMs) / 60_000;
    const step = STEPS.find((wide) => minutes / wide <= most) ?? 1440 * Math.ceil(minutes / most / 1440);
    const found: { epochMs: number; label: string }[] = [];
    const fine = Math.min(step, 15) * 60_000;
    for (let t = Math.ceil(startEpochMs / fine) * fine; t <= endEpochMs; t += fine) {
      const local = this.#local(t);
      const minuteOfDay = local.getUTCHours() * 60 + local.getUTCMinutes();
      if (minuteOfDay % Math.min(step, 1440) !== 0) continue;
      if (step > 1440 && Math.floor(local.getTime() / 86_400_000) % (step / 1440) !== 0) continue;
      found.push({ epochMs: t, label: minuteOfDay === 0 ? dayOf(local) : hourOf(local) });
    }
    return found;
  }
}

const STEPS = [5, 10, 15, 30, 60, 120, 180, 360, 720, 1440];

function hourOf(date: Date): string {
  return `${String(date.getUTCHours()).padStart(2, "0")}:${String(date.getUTCMinutes()).padStart(2, "0")}`;
}

function dayOf(date: Date): string {
  return `${date.getUTCDate()} ${MONTHS[date.getUTCMonth()]}`;
}
