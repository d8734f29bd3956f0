import os from "node:os";
import path from "node:path";
import { parseArgs } from "node:util";
import { seedsOf } from "../ablation/options.ts";

/** Faults, whole networks at fault, a true cloudburst; and radars that are wrong over sound gauges. */
const FAULT_WORLDS = [
  "gauge-faults",
  "network-in-inches",
  "network-clock-late",
  "cloudburst",
  "mixed",
  "blind-zone",
  "bright-band",
  "hail",
  "blocked-sector",
  "warm-rain",
] as const;

export interface FaultOptions {
  readonly worlds: readonly string[];
  readonly seeds: readonly number[];
  readonly cache: string;
  /** Where what runs gave is kept, to be judged anew; undefined to run each time. */
  readonly evidence: string | undefined;
  /** A file of results: what it holds is not measured again. */
  readonly results: string | undefined;
}

export const USAGE = `npm run bench -- faults [--worlds a,b] [--seeds 1-2,5] [--cache DIR] [--evidence DIR] [--results FILE]
  --worlds A,B    ${FAULT_WORLDS.join(", ")}   [all of them]
  --seeds LIST    1 to 10 are for tuning, 11 to 30 for reporting   [1]
  --cache DIR     where worlds are made and kept; RAINRECKON_WORLDS says it too   [a folder in the temp folder]
  --evidence DIR  keeps what a run gave for judging: with it a change of the rule is measured in seconds, and a change of
                  the runs themselves is not seen
  --results FILE  a line of JSON for each world and seed; what this state of the code measured before is not measured again`;

/** @throws Error with the usage where the words make no sense */
export function faultOptions(args: readonly string[]): FaultOptions {
  const { values } = parseArgs({
    args: [...args],
    options: {
      worlds: { type: "string" },
      seeds: { type: "string", default: "1" },
      cache: { type: "string" },
      evidence: { type: "string" },
      results: { type: "string" },
    },
  });
  const worlds = values.worlds?.split(",") ?? FAULT_WORLDS;
  const stray = worlds.find((world) => !(FAULT_WORLDS as readonly string[]).includes(world));
  if (stray !== undefined) throw new Error(`no world ${stray}\n${USAGE}`);
  return {
    worlds,
    seeds: seedsOf(values.seeds),
    cache: path.resolve(
      values.cache ?? process.env.RAINRECKON_WORLDS ?? path.join(os.tmpdir(), "rainreckon-worlds"),
    ),
    evidence: values.evidence === undefined ? undefined : path.resolve(values.evidence),
    results: values.results,
  };
}
