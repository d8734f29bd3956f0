import os from "node:os";
import path from "node:path";
import { parseArgs } from "node:util";
import { METHOD_NAMES } from "@rainreckon/adjustment";
import { seedsOf } from "../ablation/options.ts";
import { ADJUSTMENT_WORLDS } from "../adjustment/worlds.ts";

export interface CoverageOptions {
  readonly worlds: readonly string[];
  readonly seeds: readonly number[];
  /** How the plan adjusts. */
  readonly method: string;
  readonly cache: string;
  /** A file of results: what it holds is not measured again. */
  readonly results: string | undefined;
}

const METHODS = ["by-cross-validation", ...METHOD_NAMES];

export const USAGE = `npm run bench -- coverage [--worlds a,b] [--seeds 1-2,5] [--method NAME] [--cache DIR] [--results FILE]
  --worlds A,B   ${ADJUSTMENT_WORLDS.join(", ")}   [all of them]
  --seeds LIST   1 to 10 are for tuning, 11 to 30 for reporting   [1]
  --method NAME  ${METHODS.join(", ")}   [by-cross-validation]
  --cache DIR    where worlds are made and kept; RAINRECKON_WORLDS says it too   [a folder in the temp folder]
  --results FILE a line of JSON for each world and seed; what this state of the code measured before is not measured again`;

/** @throws Error with the usage where the words make no sense */
export function coverageOptions(args: readonly string[]): CoverageOptions {
  const { values } = parseArgs({
    args: [...args],
    options: {
      worlds: { type: "string" },
      seeds: { type: "string", default: "1" },
      method: { type: "string", default: "by-cross-validation" },
      cache: { type: "string" },
      results: { type: "string" },
    },
  });
  const worlds = values.worlds?.split(",") ?? ADJUSTMENT_WORLDS;
  const stray = worlds.find((world) => !ADJUSTMENT_WORLDS.includes(world));
  if (stray !== undefined) throw new Error(`no world ${stray}\n${USAGE}`);
  if (!METHODS.includes(values.method)) throw new Error(`no method ${values.method}\n${USAGE}`);
  return {
    worlds,
    seeds: seedsOf(values.seeds),
    method: values.method,
    cache: path.resolve(
      values.cache ?? process.env.RAINRECKON_WORLDS ?? path.join(os.tmpdir(), "rainreckon-worlds"),
    ),
    results: values.results,
  };
}
