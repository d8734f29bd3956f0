import os from "node:os";
import path from "node:path";
import { parseArgs } from "node:util";
import type { WorldSize } from "./worlds.ts";

/** Worlds in which the radars differ; those of gauges share the rain of these. */
const RADAR_WORLDS = [
  "bright-band",
  "blind-zone",
  "warm-rain",
  "false-echo",
  "blocked-sector",
  "calibration-low",
  "calibration-true",
  "calibration-high",
  "hail",
  "mixed",
  "mixed-without-attenuation",
  "mixed-without-false-echo",
  "mixed-without-bright-band",
  "mixed-without-blockage",
  "mixed-without-calibration",
  "mixed-without-hail",
] as const;

export interface AblationOptions {
  readonly worlds: readonly string[];
  readonly seeds: readonly number[];
  readonly size: WorldSize;
  /** Each step added in turn and each removed alone; or only what the aims speak of. */
  readonly steps: boolean;
  /** Moments that the files are to have, by name: what is a step worth in archives of reflectivity alone? */
  readonly moments: readonly string[] | undefined;
  readonly cache: string;
  readonly workers: number;
  /** A file of results: what it holds is not measured again. */
  readonly results: string | undefined;
}

export const USAGE = `npm run bench -- ablation [--worlds a,b] [--seeds 1-2,5] [--size small|full] [--steps] [--moments DBZH] [--workers 1|2] [--cache DIR] [--results FILE]
  --worlds A,B   ${RADAR_WORLDS.join(", ")}   [all of them]
  --seeds LIST   1 to 10 are for tuning, 11 to 30 for reporting   [1]
  --steps        each step added in turn, and each removed alone, too
  --moments LIST as if the scans held no other moments than these, such as DBZH
  --cache DIR    where worlds are made and kept; RAINRECKON_WORLDS says it too   [a folder in the temp folder]
  --results FILE a line of JSON for each world and seed; what this state of the code measured before is not measured again`;

/** @throws Error with the usage where the words make no sense */
export function ablationOptions(args: readonly string[]): AblationOptions {
  const { values } = parseArgs({
    args: [...args],
    options: {
      worlds: { type: "string" },
      seeds: { type: "string", default: "1" },
      size: { type: "string", default: "small" },
      steps: { type: "boolean", default: false },
      headline: { type: "boolean", default: false },
      moments: { type: "string" },
      workers: { type: "string", default: "1" },
      cache: { type: "string" },
      results: { type: "string" },
    },
  });
  const worlds = values.worlds?.split(",") ?? RADAR_WORLDS;
  const stray = worlds.find((world) => !(RADAR_WORLDS as readonly string[]).includes(world));
  if (stray !== undefined) throw new Error(`no world ${stray}\n${USAGE}`);
  if (values.size !== "small" && values.size !== "full") throw new Error(USAGE);
  if (values.workers !== "1" && values.workers !== "2") throw new Error(USAGE);
  if (values.steps && values.headline) throw new Error(`--steps or --headline, not both\n${USAGE}`);
  return {
    worlds,
    seeds: seedsOf(values.seeds),
    size: values.size,
    steps: values.steps,
    moments: values.moments?.split(","),
    cache: path.resolve(
      values.cache ?? process.env.RAINRECKON_WORLDS ?? path.join(os.tmpdir(), "rainreckon-worlds"),
    ),
    workers: Number(values.workers),
    results: values.results,
  };
}

/** "1-3,7" as numbers. */
export function seedsOf(text: string): number[] {
  return text.split(",").flatMap((part) => {
    const found = /^(\d+)(?:-(\d+))?$/.exec(part);
    if (found === null) throw new Error(`no seeds: ${part}\n${USAGE}`);
    const from = Number(found[1]);
    const to = Number(found[2] ?? found[1]);
    return Array.from({ length: to - from + 1 }, (_, i) => from + i);
  });
}
