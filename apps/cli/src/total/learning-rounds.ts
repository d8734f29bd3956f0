import type { MeasuredEcho, PolarEcho } from "@rainreckon/core";
import type { JobRadar, JobRound } from "./job.ts";
import { RoundEchoes } from "./round-echoes.ts";

/** What radars showed at about one instant; a radar without a round near it is left out. */
export interface LearningInstant {
  readonly rounds: ReadonlyMap<JobRadar, JobRound>;
}

/** At most so many of a list, the first and the last among them, at even steps. */
export function spreadEvenly<Item>(items: readonly Item[], most: number): Item[] {
  if (items.length <= most) return [...items];
  if (most === 1) return items.slice(0, 1);
  return Array.from(
    { length: most },
    (_, k) => items[Math.round((k * (items.length - 1)) / (most - 1))] as Item,
  );
}

/**
 * Instants to learn from: rounds of the radar that has most, spread evenly, and of every other radar the round nearest
 * in time to each, each round once. What radars see of the same rain can then be compared.
 *
 * Radars of other times (or with more rounds elsewhere) have instants of their own behind these.
 */
export function learningInstants(radars: readonly JobRadar[], most: number): LearningInstant[] {
  const byRounds = radars.toSorted(
    (a, b) => b.rounds.length - a.rounds.length || (a.site.id < b.site.id ? -1 : 1),
  );
  const taken = new Map<JobRadar, Set<JobRound>>(radars.map((radar) => [radar, new Set()]));
  const instants: LearningInstant[] = [];
  for (const leader of byRounds) {
    const left = leader.rounds.filter((round) => taken.get(leader)?.has(round) === false);
    const room = most - (taken.get(leader)?.size ?? 0);
    if (room <= 0) continue;
    for (const round of spreadEvenly(left, room)) {
      const rounds = new Map([[leader, round]]);
      taken.get(leader)?.add(round);
      for (const other of radars) {
        if (other === leader) continue;
        const near = nearestRound(other, round.firstMidEpochMs);
        if (near === undefined || taken.get(other)?.has(near) !== false) continue;
        rounds.set(other, near);
        taken.get(other)?.add(near);
      }
      instants.push({ rounds });
    }
  }
  return instants;
}

/** The round nearest to an instant, if it lies within one round of it. */
function nearestRound({ rounds, time }: JobRadar, epochMs: number): JobRound | undefined {
  let best: JobRound | undefined;
  let least = time.medianRoundMs;
  for (const round of rounds) {
    const away = Math.abs(round.firstMidEpochMs - epochMs);
    if (away >= least) continue;
    least = away;
    best = round;
  }
  return best;
}

/**
 * Every sweep of a round that decodes, lowest first; a unit of work tells of those that do not.
 *
 * @param wanted - moments beside the reflectivity; all where left out
 */
export function forEachEcho(
  radar: JobRadar,
  round: JobRound,
  take: (echo: PolarEcho, above: MeasuredEcho | undefined) => void,
  wanted?: readonly string[],
): void {
  const echoes = new RoundEchoes(radar, round, () => {}, wanted);
  try {
    for (const sweep of round.sweeps) {
      try {
        const echo = echoes.echo(sweep);
        if (echo !== undefined) take(echo, echoes.above(sweep));
      } catch (error) {
        echoes.tell(sweep, error);
      }
    }
  } finally {
    echoes.close();
  }
}
