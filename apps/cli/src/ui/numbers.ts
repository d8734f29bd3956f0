import { DateTime } from "luxon";
import { findZone } from "../plan/zone.ts";

/** A count with its thousands set apart: 10,000. */
export function countText(count: number): string {
  return Math.round(count)
    .toString()
    .replace(/\B(?=(\d{3})+$)/g, ",");
}

/** A count with its noun: "1 file", "10,000 files". */
export function counted(count: number, noun: string, plural = `${noun}s`): string {
  return `${countText(count)} ${count === 1 ? noun : plural}`;
}

/** At most so many decimals, without trailing zeros; "–" where there is no number. */
export function decimals(value: number | undefined, digits: number): string {
  if (value === undefined || !Number.isFinite(value)) return "–";
  const rounded = Number(value.toFixed(digits));
  return String(rounded === 0 ? 0 : rounded);
}

/** A number with always so many decimals; "–" where there is none. */
export function fixedDecimals(value: number | undefined | null, digits: number): string {
  if (value === undefined || value === null || !Number.isFinite(value)) return "–";
  return value.toFixed(digits);
}

/** A depth in mm to tenths; one that a tenth would round away keeps a digit, so that it is never taken for none. */
export function depthText(mm: number | undefined | null): string {
  if (typeof mm !== "number" || !(mm > 0 && mm < 0.05)) return fixedDecimals(mm, 1);
  return mm < 0.0005 ? "< 0.001" : String(Number(mm.toPrecision(1)));
}

/** Position for people: 51.2000° N, 4.1000° E. */
export function placeText(lonDeg: number, latDeg: number): string {
  const lat = `${Math.abs(latDeg).toFixed(4)}° ${latDeg < 0 ? "S" : "N"}`;
  return `${lat}, ${Math.abs(lonDeg).toFixed(4)}° ${lonDeg < 0 ? "W" : "E"}`;
}

/** An instant in UTC as machines and plans read it, without empty fractions: 2031-05-03T12:00:00Z. */
export function isoUtc(epochMs: number): string {
  return new Date(epochMs).toISOString().replace(".000Z", "Z");
}

/** An instant in UTC for people: 2031-05-03 12:00:00 UTC, seconds only where they are not 0. */
export function utcText(epochMs: number): string {
  const iso = new Date(epochMs).toISOString();
  const seconds = iso.slice(17, 19) === "00" ? "" : iso.slice(16, 19);
  return `${iso.slice(0, 10)} ${iso.slice(11, 16)}${seconds} UTC`;
}

/** An instant on the clock of a zone, with that clock's offset: 2031-05-03 14:00 UTC+2. */
export function localText(epochMs: number, zoneName: string): string {
  const zone = findZone(zoneName);
  return DateTime.fromMillis(epochMs, { zone: zone ?? "UTC" })
    .setLocale("en")
    .toFormat("yyyy-MM-dd HH:mm 'UTC'Z");
}

/** A length of time for people: 45 s, 5 min, 1 h 30 min; from an hour on to the minute. */
export function lengthText(lengthMs: number): string {
  const seconds = Math.round(lengthMs / 1000);
  if (seconds < 60) return `${seconds} s`;
  if (seconds < 3600) return withRest(Math.floor(seconds / 60), "min", seconds % 60, "s");
  const minutes = Math.round(seconds / 60);
  return withRest(Math.floor(minutes / 60), "h", minutes % 60, "min");
}

function withRest(count: number, unit: string, rest: number, restUnit: string): string {
  return rest === 0 ? `${count} ${unit}` : `${count} ${unit} ${rest} ${restUnit}`;
}
