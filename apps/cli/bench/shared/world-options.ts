import os from "node:os";
import path from "node:path";
import { seedsOf } from "../ablation/options.ts";

/** What every measurement on worlds is asked. */
export interface WorldOptions {
  readonly worlds: readonly string[];
  readonly seeds: readonly number[];
  readonly cache: string;
  /** A file of results: what it holds is not measured again. */
  readonly results: string | undefined;
}

/** The flags of {@link WorldOptions}, for `parseArgs`. */
export const WORLD_FLAGS = {
  worlds: { type: "string" },
  seeds: { type: "string", default: "1" },
  cache: { type: "string" },
  results: { type: "string" },
} as const;

/** How they are used, for a bench with its own worlds. */
export function worldUsage(worlds: readonly string[]): string {
  return `  --worlds A,B    ${worlds.join(", ")}   [all of them]
  --seeds LIST    1 to 10 are for tuning, 11 to 30 for reporting   [1]
  --cache DIR     where worlds are made and kept; RAINRECKON_WORLDS says it too   [a folder in the temp folder]
  --results FILE  a line of JSON for each world and seed; what this state of the code measured before is not measured again`;
}

/** @throws Error with the usage where a world is not known */
export function worldOptions(
  values: {
    readonly worlds?: string | undefined;
    readonly seeds: string;
    readonly cache?: string | undefined;
    readonly results?: string | undefined;
  },
  known: readonly string[],
  usage: string,
): WorldOptions {
  const worlds = values.worlds?.split(",") ?? known;
  const stray = worlds.find((world) => !known.includes(world));
  if (stray !== undefined) throw new Error(`no world ${stray}\n${usage}`);
  return {
    worlds,
    seeds: seedsOf(values.seeds),
    cache: path.resolve(
      values.cache ?? process.env.RAINRECKON_WORLDS ?? path.join(os.tmpdir(), "rainreckon-worlds"),
    ),
    results: values.results,
  };
}
