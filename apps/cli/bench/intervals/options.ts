import { parseArgs } from "node:util";
import { METHOD_NAMES } from "@rainreckon/adjustment";
import { ADJUSTMENT_WORLDS } from "../adjustment/worlds.ts";
import { WORLD_FLAGS, type WorldOptions, worldOptions, worldUsage } from "../shared/world-options.ts";

export interface CoverageOptions extends WorldOptions {
  /** How the plan adjusts. */
  readonly method: string;
}

const METHODS = ["by-cross-validation", ...METHOD_NAMES];

export const USAGE = `npm run bench -- coverage [--worlds a,b] [--seeds 1-2,5] [--method NAME] [--cache DIR] [--results FILE]
${worldUsage(ADJUSTMENT_WORLDS)}
  --method NAME   ${METHODS.join(", ")}   [by-cross-validation]`;

/** @throws Error with the usage where the words make no sense */
export function coverageOptions(args: readonly string[]): CoverageOptions {
  const options = { ...WORLD_FLAGS, method: { type: "string", default: "by-cross-validation" } } as const;
  const { values } = parseArgs({ args: [...args], options });
  if (!METHODS.includes(values.method)) throw new Error(`no method ${values.method}\n${USAGE}`);
  return { ...worldOptions(values, ADJUSTMENT_WORLDS, USAGE), method: values.method };
}
