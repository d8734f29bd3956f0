import { midEpochMs, type SweepHeader, type Volume } from "./model/radar.ts";

/** Elevations this near count as the same one; the second number keeps binary rounding from deciding. */
const SAME_ELEVATION_DEG = 0.05 + 1e-9;

/**
 * Divides the sweeps of one site into rounds.
 *
 * A new round starts when an elevation is seen again (equal within 0.05 degrees), or after a gap, from
 * the latest end so far to the next start, that is longer than `maxSilenceMs`. So two cuts at one
 * elevation are two rounds, each with its own instant.
 *
 * @param headers - sweeps of one site, in any order
 * @returns rounds in time order, their sweeps by start, then elevation, path and dataset; every sweep is in one round
 * @throws RangeError if sweeps of two sites are mixed
 */
export function groupIntoRounds(
  headers: readonly SweepHeader[],
  options: { readonly maxSilenceMs: number },
): readonly Volume[] {
  const sites = new Set(headers.map((header) => header.site.id));
  if (sites.size > 1) throw new RangeError(`rounds are of one site, got ${[...sites].join(", ")}`);

  const rounds: { siteId: string; sweeps: SweepHeader[] }[] = [];
  let latestEndMs = Number.NEGATIVE_INFINITY;
  for (const header of [...headers].sort(byStart)) {
    const current = rounds.at(-1);
    const silent = header.startEpochMs - latestEndMs > options.maxSilenceMs;
    if (current === undefined || silent || current.sweeps.some((sweep) => sameElevation(sweep, header))) {
      rounds.push({ siteId: header.site.id, sweeps: [header] });
    } else {
      current.sweeps.push(header);
    }
    latestEndMs = Math.max(latestEndMs, header.endEpochMs);
  }
  return rounds;
}

/**
 * Median time between the rounds of one site: of the differences between the mid-times of the lowest
 * sweeps of successive rounds.
 *
 * Rounds out of one file are one turn of the antenna's programme, and the first of them counts: a volume that looks
 * twice at its lowest elevation gives two instants a minute apart, and then none for four. The short way between
 * them is not how long the radar takes from round to round. Where all rounds came in one file, each counts.
 *
 * @param volumes - rounds of one site, in time order
 * @returns undefined for fewer than two rounds
 */
export function medianRoundMs(volumes: readonly Volume[]): number | undefined {
  const rounds = volumes.filter(({ sweeps }) => sweeps.length > 0);
  const firstOfFile = rounds.filter((round, index) => index === 0 || !sharesFile(rounds[index - 1], round));
  const times = (firstOfFile.length > 1 ? firstOfFile : rounds).map((volume) =>
    midEpochMs(lowestSweep(volume)),
  );
  const differences = times.slice(1).map((time, index) => time - (times[index] as number));
  if (differences.length === 0) return undefined;
  const sorted = differences.sort((one, other) => one - other);
  const upper = sorted[Math.floor(sorted.length / 2)] as number;
  const lower = sorted[Math.floor((sorted.length - 1) / 2)] as number;
  return (lower + upper) / 2;
}

function sharesFile(before: Volume | undefined, round: Volume): boolean {
  const paths = new Set(before?.sweeps.map(({ origin }) => origin.path));
  return round.sweeps.some(({ origin }) => paths.has(origin.path));
}

function lowestSweep({ sweeps }: Volume): SweepHeader {
  return sweeps.reduce((lowest, sweep) => (sweep.elevationDeg < lowest.elevationDeg ? sweep : lowest));
}

/** A sweep that may have been sent twice, with a hash of its content where the caller has one. */
export interface SentSweep {
  readonly header: SweepHeader;
  readonly contentHash?: string;
}

/** A sweep that was sent again and does not count. */
export interface DroppedSweep<Item extends SentSweep> {
  readonly item: Item;
  readonly keptInstead: Item;
  /** "not compared" where either has no hash. */
  readonly content: "same" | "different" | "not compared";
  /** One sentence for the user. */
  readonly reason: string;
}

/**
 * Finds sweeps that were sent more than once (same site, same start, elevations equal within 0.05
 * degrees, a moment in common) and keeps one of each. One moment a file is no re-send.
 *
 * First and last are by path, then dataset, in code-unit order, so that the order in which a folder is
 * listed changes nothing.
 *
 * @param rule - which one counts
 * @returns `kept` in the order of `items`; `dropped` with the reason of each
 */
export function dropResent<Item extends SentSweep>(
  items: readonly Item[],
  rule: "first" | "last",
): { readonly kept: readonly Item[]; readonly dropped: readonly DroppedSweep<Item>[] } {
  const groups: Item[][] = [];
  const groupsOfInstant = new Map<string, Item[][]>();
  for (const item of items) {
    const instant = `${item.header.site.id}\u001f${item.header.startEpochMs}`;
    const candidates = groupsOfInstant.get(instant) ?? [];
    groupsOfInstant.set(instant, candidates);
    const group = candidates.find(
      ([first, ...others]) =>
        sameElevation((first as Item).header, item.header) &&
        [first as Item, ...others].some(({ header }) => isSentAgain(header, item.header)),
    );
    if (group !== undefined) {
      group.push(item);
    } else {
      const opened = [item];
      candidates.push(opened);
      groups.push(opened);
    }
  }

  const kept = new Set<Item>();
  const dropped: DroppedSweep<Item>[] = [];
  for (const group of groups) {
    const ordered = [...group].sort((one, other) => byOrigin(one.header, other.header));
    const keptInstead = (rule === "first" ? ordered[0] : ordered.at(-1)) as Item;
    kept.add(keptInstead);
    for (const item of ordered) if (item !== keptInstead) dropped.push(droppedSweep(item, keptInstead, rule));
  }
  return { kept: items.filter((item) => kept.has(item)), dropped };
}

/** Sweeps of one instant without a moment in common are parts of one sweep, as `joinParts` has them. */
function isSentAgain(one: SweepHeader, other: SweepHeader): boolean {
  return sharesMoment(one, other) || one.quantities.length === 0 || other.quantities.length === 0;
}

/** Whether two sweeps have a moment of one name. */
export function sharesMoment(one: SweepHeader, other: SweepHeader): boolean {
  return one.quantities.some((quantity) => other.quantities.includes(quantity));
}

function droppedSweep<Item extends SentSweep>(
  item: Item,
  keptInstead: Item,
  rule: "first" | "last",
): DroppedSweep<Item> {
  const { path, dataset } = keptInstead.header.origin;
  const other = `${path} ${dataset}`.trimEnd();
  if (item.contentHash === undefined || keptInstead.contentHash === undefined) {
    const reason = `sent again; contents were not compared, the ${rule} counts: ${other}`;
    return { item, keptInstead, content: "not compared", reason };
  }
  if (item.contentHash === keptInstead.contentHash) {
    return { item, keptInstead, content: "same", reason: `sent again with the same content as ${other}` };
  }
  const reason = `sent again with other content, the ${rule} counts: ${other}`;
  return { item, keptInstead, content: "different", reason };
}

/** Whether two sweeps look at one elevation, equal within 0.05 degrees. */
export function sameElevation(one: SweepHeader, other: SweepHeader): boolean {
  return Math.abs(one.elevationDeg - other.elevationDeg) <= SAME_ELEVATION_DEG;
}

function byStart(one: SweepHeader, other: SweepHeader): number {
  return (
    one.startEpochMs - other.startEpochMs || one.elevationDeg - other.elevationDeg || byOrigin(one, other)
  );
}

function byOrigin(one: SweepHeader, other: SweepHeader): number {
  return (
    byCodeUnits(one.origin.path, other.origin.path) || byCodeUnits(one.origin.dataset, other.origin.dataset)
  );
}

/** Not by locale: the same files must sort the same way on every machine. */
function byCodeUnits(one: string, other: string): number {
  if (one === other) return 0;
  return one < other ? -1 : 1;
}
