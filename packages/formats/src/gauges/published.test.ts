import { checkValue, inputNumber, runReferenceSuite } from "@rainreckon/test-data/published";
import { type CounterOutcome, counterIncrements } from "./counter.ts";
import { MAX_MM_PER_MINUTE } from "./readings.ts";
import { StampScanner } from "./stamp.ts";
import { ZoneClock } from "./zone-clock.ts";

const STEP_MS = 10 * 60_000;

/** The increments of an entry's levels, ten minutes apart. */
function increments(levels: readonly (number | null)[], jitterMm: number, rollsOverAtMm?: number) {
  return counterIncrements(
    levels.map((level) => level ?? Number.NaN),
    levels.map((_, index) => index * STEP_MS),
    { jitterMm, rollsOverAtMm, maxMmPerMinute: MAX_MM_PER_MINUTE },
  );
}

const cumulative = () => {
  const { inputs } = checkValue("h-cumulative");
  const levels = inputs.cumulative_mm as (number | null)[];
  return { levels, ...increments(levels, inputs.noise_mm as number) };
};

/** The entry's words for what we call by others; a level after a missing one is a total over the gap. */
function bookWord(outcome: CounterOutcome, afterGap: boolean): string {
  if (outcome === "jitter") return "small-negative";
  return outcome === "ok" && afterGap ? "gap-total" : outcome;
}

function localMidnightMs(clock: ZoneClock, date: string, daysLater: number): number {
  const stamps = new StampScanner();
  stamps.scan(`${date} 00:00`);
  clock.resolve(stamps.clockMs + daysLater * 86_400_000);
  return clock.earlierMs;
}

const minuteText = (epochMs: number) => new Date(epochMs).toISOString().replace(":00.000Z", "Z");

runReferenceSuite({
  topics: ["h-gauge-qc"],
  only: /^h-(cumulative|rollover|local-day-)/,
  adapters: [
    [
      "h-cumulative",
      () => {
        const { levels, incrementMm, outcomes } = cumulative();
        return outcomes.map((outcome, index) =>
          outcome === "first" || outcome === "missing"
            ? null
            : [incrementMm[index], bookWord(outcome, levels[index - 1] === null)],
        );
      },
    ],
    [
      "h-cumulative-total",
      () => {
        const { levels, incrementMm } = cumulative();
        const total = incrementMm.filter((increment) => !Number.isNaN(increment)).reduce((a, b) => a + b, 0);
        // The entry lists the two wrong totals too; they are differences of its own numbers.
        const ends = (levels[levels.length - 1] ?? 0) - (levels[0] ?? 0);
        return { total, last_minus_first: ends, negatives_kept: ends };
      },
    ],
    [
      "h-rollover",
      (entry) => {
        const tipMm = inputNumber(entry, "tip_mm");
        const levels = [inputNumber(entry, "before") * tipMm, inputNumber(entry, "after") * tipMm];
        const rolled = increments(levels, 0.3, inputNumber(entry, "modulus") * tipMm).incrementMm[1];
        const reset = increments(levels, 0.3).incrementMm[1];
        return { tips: rolled / tipMm, mm: rolled, if_reset_mm: reset };
      },
    ],
    [
      "h-local-day-*",
      (entry) => {
        const clock = new ZoneClock(entry.inputs.zone as string, "follow");
        const start = localMidnightMs(clock, entry.inputs.date as string, 0);
        const end = localMidnightMs(clock, entry.inputs.date as string, 1);
        return { hours: (end - start) / 3_600_000, start_utc: minuteText(start), end_utc: minuteText(end) };
      },
    ],
  ],
});
