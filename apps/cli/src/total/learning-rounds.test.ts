import { expect, test } from "vitest";
import type { JobRadar, JobRound } from "./job.ts";
import { learningInstants, spreadEvenly } from "./learning-rounds.ts";

const MINUTE = 60_000;

/** A radar with rounds at the minutes given; nothing else of it matters here. */
function radar(id: string, minutes: readonly number[]): JobRadar {
  const rounds = minutes.map(
    (minute): JobRound => ({
      sweeps: [],
      firstMidEpochMs: minute * MINUTE,
      lastMidEpochMs: minute * MINUTE,
      isFirst: false,
      isLast: false,
    }),
  );
  return {
    site: { id, lonDeg: 0, latDeg: 0, antennaHeightM: 0 },
    rounds,
    time: { medianRoundMs: 5 * MINUTE, maxGapMs: 12.5 * MINUTE },
  } as unknown as JobRadar;
}

const every = (step: number, count: number, from = 0) =>
  Array.from({ length: count }, (_, k) => from + k * step);

test("an even part of a list keeps its first and last", () => {
  expect(spreadEvenly([1, 2, 3], 5)).toEqual([1, 2, 3]);
  expect(spreadEvenly(every(1, 11), 3)).toEqual([0, 5, 10]);
  expect(spreadEvenly(every(1, 11), 1)).toEqual([0]);
});

test("radars of one time are learned from at common instants, each round once", () => {
  const [one, other] = [radar("a", every(5, 100)), radar("b", every(5, 100, 2))];
  const instants = learningInstants([one, other], 10);
  expect(instants).toHaveLength(10);
  const seen = new Set<JobRound>();
  for (const { rounds } of instants) {
    const [mine, theirs] = [rounds.get(one), rounds.get(other)];
    expect(Math.abs(mine!.firstMidEpochMs - theirs!.firstMidEpochMs)).toBeLessThan(5 * MINUTE);
    for (const round of rounds.values()) {
      expect(seen.has(round)).toBe(false);
      seen.add(round);
    }
  }
});

test("a radar of another time has instants of its own", () => {
  const [one, other] = [radar("a", every(5, 20)), radar("b", every(5, 4, 5000))];
  const instants = learningInstants([one, other], 8);
  expect(instants.filter(({ rounds }) => rounds.has(one))).toHaveLength(8);
  expect(instants.filter(({ rounds }) => rounds.has(other))).toHaveLength(4);
  expect(instants.some(({ rounds }) => rounds.size === 2)).toBe(false);
});

test("the order in which radars are named changes nothing but that", () => {
  const [one, other] = [radar("a", every(5, 30)), radar("b", every(10, 15))];
  const key = (radars: readonly JobRadar[]) =>
    learningInstants(radars, 6)
      .map(({ rounds }) => [one, other].map((of) => rounds.get(of)?.firstMidEpochMs).join("/"))
      .join(" ");
  expect(key([one, other])).toBe(key([other, one]));
});
