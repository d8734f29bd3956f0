import path from "node:path";
import { parseArgs } from "node:util";
import { WORLD_FLAGS, type WorldOptions, worldOptions, worldUsage } from "../shared/world-options.ts";

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

export interface FaultOptions extends WorldOptions {
  /** Where what runs gave is kept, to be judged anew; undefined to run each time. */
  readonly evidence: string | undefined;
}

export const USAGE = `npm run bench -- faults [--worlds a,b] [--seeds 1-2,5] [--cache DIR] [--evidence DIR] [--results FILE]
${worldUsage(FAULT_WORLDS)}
  --evidence DIR  keeps what a run gave for judging: with it a change of the rule is measured in seconds, and a change of
                  the runs themselves is not seen`;

/** @throws Error with the usage where the words make no sense */
export function faultOptions(args: readonly string[]): FaultOptions {
  const options = { ...WORLD_FLAGS, evidence: { type: "string" } } as const;
  const { values } = parseArgs({ args: [...args], options });
  const { evidence } = values;
  return {
    ...worldOptions(values, FAULT_WORLDS, USAGE),
    evidence: evidence === undefined ? undefined : path.resolve(evidence),
  };
}
