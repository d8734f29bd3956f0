import type { SweepHeader } from "./model/radar.ts";
import { type SentSweep, sameElevation, sharesMoment } from "./rounds.ts";

/** Doppler follows surveillance within this time, from the end of one to the start of the other. */
const LONGEST_BETWEEN_CUTS_MS = 60_000;

/** A sweep that may have come in parts, each with other moments. */
export interface JoinedSweep<Item extends SentSweep> {
  /** That of the first part, with the moments and remarks of all. */
  readonly header: SweepHeader;
  readonly parts: readonly Item[];
}

/**
 * Whether two sweeps are parts of one: same site, start, elevation (within 0.05 degrees) and rays, and no moment in
 * common. So one moment a file makes one sweep, and a sweep that was sent again, which shares moments, is no part.
 */
export function arePartsOfOne(one: SweepHeader, other: SweepHeader): boolean {
  return (
    one.site.id === other.site.id &&
    one.startEpochMs === other.startEpochMs &&
    sameElevation(one, other) &&
    !sharesMoment(one, other)
  );
}

/**
 * Joins the parts of each sweep. Nothing is decoded and no gate moved: parts may differ in their gates.
 *
 * @param items - of any sites, in any order, without re-sent sweeps
 * @returns sweeps in the order of their first parts
 */
export function joinParts<Item extends SentSweep>(items: readonly Item[]): readonly JoinedSweep<Item>[] {
  const joined: { header: SweepHeader; parts: Item[] }[] = [];
  const ofInstant = new Map<string, { header: SweepHeader; parts: Item[] }[]>();
  for (const item of items) {
    const instant = `${item.header.site.id}\u001f${item.header.startEpochMs}`;
    const candidates = ofInstant.get(instant) ?? [];
    ofInstant.set(instant, candidates);
    const whole = candidates.find(({ header }) => arePartsOfOne(header, item.header));
    if (whole === undefined) {
      const opened = { header: item.header, parts: [item] };
      candidates.push(opened);
      joined.push(opened);
      continue;
    }
    whole.parts.push(item);
    const quantities = [...whole.header.quantities, ...item.header.quantities].sort();
    const remarks = [...new Set([...whole.header.remarks, ...item.header.remarks])];
    whole.header = { ...whole.header, quantities, remarks };
  }
  return joined;
}

/**
 * Finds the Doppler cuts of split cuts: a surveillance cut without velocity, then a Doppler cut at the same elevation
 * with it. Both hold reflectivity; the surveillance cut sees farther and folds nothing, so rain is taken from that,
 * and the Doppler cut is no scan of its own time.
 *
 * @param headers - sweeps of one site, in any order
 * @returns the Doppler cuts, each with its surveillance cut
 * @see Interface Control Document 2620002, NOAA Radar Operations Center: waveform types "contiguous surveillance" and
 *   "contiguous Doppler" of a volume coverage pattern
 */
export function dopplerCuts(headers: readonly SweepHeader[]): ReadonlyMap<SweepHeader, SweepHeader> {
  const pairs = new Map<SweepHeader, SweepHeader>();
  const ordered = [...headers].sort((one, other) => one.startEpochMs - other.startEpochMs);
  ordered.forEach((cut, index) => {
    const before = ordered[index - 1];
    if (before === undefined || !sameElevation(before, cut)) return;
    const follows = Math.abs(cut.startEpochMs - before.endEpochMs) <= LONGEST_BETWEEN_CUTS_MS;
    const velocityOnlyHere = hasVelocity(cut) && !hasVelocity(before);
    if (follows && velocityOnlyHere && sharesMoment(before, cut)) pairs.set(cut, before);
  });
  return pairs;
}

function hasVelocity({ quantities }: SweepHeader): boolean {
  return quantities.includes("VRADH") || quantities.includes("VRADV") || quantities.includes("VRAD");
}
