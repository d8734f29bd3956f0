import { parseArgs } from "node:util";
import { generateStorm } from "./generate.ts";
import { PRESETS } from "./presets.ts";

const USAGE = `Makes the invented Saltermoor storm: radar files, gauge files, catchments, terrain, and the truth.

Usage:   node test-data/dist/storm.mjs FOLDER [--preset NAME] [--seed N]
  --preset NAME   ${Object.keys(PRESETS).join(", ")}   [demo]
  --seed N        another storm of the same kind   [1]
`;

/** Runs the generator from the command line. @returns the exit status */
export async function runStormCommand(args: readonly string[]): Promise<number> {
  try {
    const { values, positionals } = parseArgs({
      args: [...args],
      options: { preset: { type: "string" }, seed: { type: "string" }, help: { type: "boolean" } },
      allowPositionals: true,
    });
    if (values.help) {
      process.stdout.write(USAGE);
      return 0;
    }
    const preset = PRESETS[values.preset ?? "demo"];
    const seed = Number(values.seed ?? preset?.seed);
    if (positionals.length !== 1 || preset === undefined || !Number.isInteger(seed)) {
      process.stderr.write(USAGE);
      return 2;
    }
    const started = performance.now();
    const done = await generateStorm({ ...preset, seed, folder: positionals[0]! });
    const seconds = ((performance.now() - started) / 1000).toFixed(1);
    process.stdout.write(
      `${done.radarFiles} radar files, ${done.gaugeCount} gauges, district mean ${done.meanMm.toFixed(1)} mm, ` +
        `wettest ${done.maximumMm.toFixed(1)} mm, in ${seconds} s (all invented)\n`,
    );
    return 0;
  } catch (error) {
    process.stderr.write(`error: ${error instanceof Error ? error.message : String(error)}\n`);
    return 1;
  }
}
