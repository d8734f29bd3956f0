import type { Interval } from "@rainreckon/core";
import type { GaugeEvidence, JudgeContext } from "../evidence.ts";
import { type Account, accountOf, type Reason } from "./account.ts";
import { referenceLevel } from "./reference-level.ts";
import { subjectOf } from "./subject.ts";

const DAY_MS = 24 * 3_600_000;
/** Windows from which parts are looked at one by one: in a long one a fault of some hours goes under. House rule. */
const LONG_MS = 2 * DAY_MS;
/** Radar over a silent gauge within a day that counts, mm. */
const MISSED_MM = 5;
/** Days that must show the same, but for silence: of many days one fits something by chance. */
const LEAST_DAYS = 2;
const ALIKE_MINUTES = 10;
const ALIKE_DB = 2.5;

/**
 * Reasons that show in parts of a long window only: a gauge that stood still for some hours, a clock that missed the change
 * to or from summer time, a funnel that was blocked for a week. Each day is judged as a window of its own.
 *
 * @param accounts - over the whole window; those that have a known reason keep it
 */
export function withPartialReasons(
  accounts: readonly Account[],
  gauges: readonly GaugeEvidence[],
  context: JudgeContext,
): Account[] {
  const { startEpochMs, endEpochMs } = context.window;
  if (endEpochMs - startEpochMs < LONG_MS) return [...accounts];
  const days: (readonly Account[])[] = [];
  for (let from = startEpochMs; from + DAY_MS <= endEpochMs; from += DAY_MS) {
    const day: Interval = { startEpochMs: from, endEpochMs: from + DAY_MS };
    const subjects = gauges.map((gauge) => subjectOf(gauge, day));
    const reference = referenceLevel(subjects);
    days.push(subjects.map((subject) => accountOf(subject, reference, { ...context, window: day })));
  }
  return accounts.map((account, g) => {
    if (account.reason !== undefined && account.reason.kind !== "unknown") return account;
    const found = partialReason(days.map((day) => day[g] as Account));
    return found === undefined ? account : { ...account, ...found };
  });
}

function partialReason(days: readonly Account[]): Partial<Account> | undefined {
  const silent = days.find(({ reason }) => reason?.kind === "silent" && reason.silent.missedMm >= MISSED_MM);
  if (silent?.reason?.kind === "silent") {
    return {
      misfit: silent.misfit,
      reason: { kind: "silent", silent: { ...silent.reason.silent, wholeWindow: false } },
    };
  }
  for (const day of days) {
    const { reason } = day;
    if (reason === undefined || reason.kind === "unknown" || reason.kind === "silent") continue;
    if (
      days.filter((other) => other.reason !== undefined && isAlike(reason, other.reason)).length < LEAST_DAYS
    ) {
      continue;
    }
    const { misfit, clock, place, factor } = day;
    return { misfit, reason, clock, place, factor };
  }
  return undefined;
}

function isAlike(a: Reason, b: Reason): boolean {
  if (a.kind === "clock" && b.kind === "clock") {
    return Math.abs(a.clock.minutesLate - b.clock.minutesLate) <= ALIKE_MINUTES;
  }
  if ((a.kind === "unit" && b.kind === "unit") || (a.kind === "blocked" && b.kind === "blocked")) {
    return Math.abs(a.factor.offsetDb - b.factor.offsetDb) <= ALIKE_DB;
  }
  return a.kind === "place" && b.kind === "place";
}
