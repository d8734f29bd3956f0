import { parseArgs } from "node:util";
import { WORLD_FLAGS, type WorldOptions, worldOptions, worldUsage } from "../shared/world-options.ts";
import { ADJUSTMENT_WORLDS } from "./worlds.ts";

export const USAGE = `npm run bench -- adjustment [--worlds a,b] [--seeds 1-2,5] [--cache DIR] [--results FILE]
${worldUsage(ADJUSTMENT_WORLDS)}`;

/** @throws Error with the usage where the words make no sense */
export function adjustmentOptions(args: readonly string[]): WorldOptions {
  const { values } = parseArgs({ args: [...args], options: WORLD_FLAGS });
  return worldOptions(values, ADJUSTMENT_WORLDS, USAGE);
}
