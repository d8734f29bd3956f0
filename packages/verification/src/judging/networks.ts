import type { UnitMistake } from "../unit-checks.ts";
import type { Account } from "./account.ts";
import { underClock } from "./alternatives.ts";

/** Gauges with rain enough from which a network can be told to be off as a whole, and the share that must agree. House rule. */
const LEAST_GAUGES = 3;
const SHARE = 0.6;
/** Clocks that differ by no more are off by the same. */
const ALIKE_MINUTES = 10;
/** A gauge speaks for or against a shift where it fits so many times better or worse under it; others cannot tell. House rule. */
const TELLING = 1.5;
/** Offsets that differ by no more are of the same unit, dB. */
const ALIKE_DB = 2.5;

/** What is wrong with all gauges of a network alike. */
export interface NetworkFault {
  readonly network: string;
  /** Gauges that show it, and those that had rain enough to, or rain that tells one hour from another. */
  readonly showing: number;
  readonly judged: number;
  readonly fault:
    | { readonly kind: "clock"; readonly minutesLate: number }
    | { readonly kind: "unit"; readonly offsetDb: number; readonly mistakes: readonly UnitMistake[] };
}

/**
 * Networks of which most gauges need the same shift of the clock, or the same unit. One cause then explains them all:
 * better than one fault in each gauge, and better than a radar that is wrong over one network's gauges alone.
 */
export function networkFaults(accounts: readonly Account[]): NetworkFault[] {
  const byNetwork = new Map<string, Account[]>();
  for (const account of accounts) {
    const { network } = account.subject.evidence.series;
    byNetwork.set(network, [...(byNetwork.get(network) ?? []), account]);
  }
  return [...byNetwork].flatMap(([network, members]) => {
    const judged = members.filter(({ judgeable }) => judgeable);
    if (judged.length < LEAST_GAUGES) return [];
    const found = sharedClock(judged) ?? sharedUnit(judged);
    if (found === undefined || found.showing < SHARE * found.judged) return [];
    return [{ network, ...found }];
  });
}

type Shared = Omit<NetworkFault, "network">;

/**
 * The shift that most gauges found by themselves, put to the vote of all that can tell: where it rains much the same in
 * both hours a gauge cannot.
 */
function sharedClock(accounts: readonly Account[]): Shared | undefined {
  const shifts = accounts.flatMap(({ reason }) =>
    reason?.kind === "clock" ? [reason.clock.minutesLate] : [],
  );
  const commonest = commonestOf(shifts, ALIKE_MINUTES);
  if (commonest === undefined || commonest.count < LEAST_GAUGES) return undefined;
  const votes = accounts.map((account) => voteOn(account, commonest.value));
  const showing = votes.filter((vote) => vote === "for").length;
  const judged = votes.filter((vote) => vote !== "cannot tell").length;
  return { showing, judged, fault: { kind: "clock", minutesLate: commonest.value } };
}

function voteOn(
  { subject: { steps }, levelDb, misfit, reason }: Account,
  minutesLate: number,
): "for" | "against" | "cannot tell" {
  if (reason?.kind === "clock")
    return Math.abs(reason.clock.minutesLate - minutesLate) <= ALIKE_MINUTES ? "for" : "against";
  const shifted = steps === undefined ? undefined : underClock(steps, levelDb, minutesLate)?.misfit;
  if (shifted === undefined) return "cannot tell";
  if (shifted * TELLING <= misfit) return "for";
  return shifted >= misfit * TELLING ? "against" : "cannot tell";
}

function sharedUnit(accounts: readonly Account[]): Shared | undefined {
  const units = accounts.flatMap(({ reason }) => (reason?.kind === "unit" ? [reason] : []));
  const commonest = commonestOf(
    units.map(({ factor }) => factor.offsetDb),
    ALIKE_DB,
  );
  if (commonest === undefined) return undefined;
  const nearest = units.find(({ factor }) => factor.offsetDb === commonest.value);
  return {
    showing: commonest.count,
    judged: accounts.length,
    fault: { kind: "unit", offsetDb: commonest.value, mistakes: nearest?.mistakes ?? [] },
  };
}

/** The value that most others lie near, and how many do, itself included. */
function commonestOf(
  values: readonly number[],
  near: number,
): { readonly value: number; readonly count: number } | undefined {
  let best: { value: number; count: number } | undefined;
  for (const value of values) {
    const count = values.filter((other) => Math.abs(other - value) <= near).length;
    if (count > (best?.count ?? 0)) best = { value, count };
  }
  return best;
}
