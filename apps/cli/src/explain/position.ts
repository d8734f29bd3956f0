import type { LonLat } from "./places-asked.ts";

/** One coordinate: degrees, or degrees, minutes and seconds, and the letter that says which. */
const COORDINATE =
  /^(\d{1,3}(?:\.\d+)?)\s*°?\s*(?:(\d{1,2}(?:\.\d+)?)\s*['′]\s*(?:(\d{1,2}(?:\.\d+)?)\s*["″]\s*)?)?([NSEW])$/i;

/**
 * A position as people write it: "51.20N 4.10E", `51°12'N, 4°06'E`. Letters are asked for, since two numbers alone do
 * not tell which is the latitude.
 *
 * @returns undefined where the text is no such position
 */
export function parsePosition(text: string): LonLat | undefined {
  const halves = /^(.*?[NSEW])[\s,;]*(.*)$/i.exec(text.trim());
  const found = [halves?.[1], halves?.[2]].map((half) => COORDINATE.exec((half ?? "").trim()));
  let latDeg: number | undefined;
  let lonDeg: number | undefined;
  for (const match of found) {
    if (match === null) return undefined;
    const [, degrees, minutes = "0", seconds = "0", letter = ""] = match;
    if (Number(minutes) >= 60 || Number(seconds) >= 60) return undefined;
    const size = Number(degrees) + Number(minutes) / 60 + Number(seconds) / 3600;
    const value = /[SW]/i.test(letter) ? -size : size;
    if (/[NS]/i.test(letter)) latDeg = value;
    else lonDeg = value;
  }
  if (latDeg === undefined || lonDeg === undefined || Math.abs(latDeg) > 90 || Math.abs(lonDeg) > 180)
    return undefined;
  return { lonDeg, latDeg };
}
