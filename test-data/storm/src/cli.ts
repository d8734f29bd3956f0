import { parseArgs } from "node:util";
import { truthDigest } from "./frozen.ts";
import { generateStorm } from "./generate.ts";
import { PRESETS, type StormPreset } from "./presets.ts";
import { WORLDS, worldStorm } from "./worlds.ts";

const USAGE = `Makes the invented Saltermoor storm: radar files, gauge files, catchments, terrain, and the truth.

Usage:   node test-data/dist/storm.mjs FOLDER [--preset NAME] [--seed N] [--gates]
         node test-data/dist/storm.mjs FOLDER --world NAME [--seed N] [--size small|full] [--gates]
         node test-data/dist/storm.mjs --list
  --preset NAME   ${Object.keys(PRESETS).join(", ")}   [demo]
  --world NAME    one of the frozen worlds instead; --list names them
  --seed N        another storm of the same kind   [1]
  --size SIZE     of a world: small (60 km, 24 rounds) or full (160 km, 72 rounds)   [small]
  --gates         write what is true at every gate too: loss, rain below, clutter
`;

/** The storm that the options ask for; undefined where they do not fit together. */
function chosenStorm(values: {
  readonly preset?: string | undefined;
  readonly world?: string | undefined;
  readonly seed?: string | undefined;
  readonly size?: string | undefined;
}): StormPreset | undefined {
  const { preset: presetName, world, size = "small" } = values;
  if (values.seed !== undefined && !/^\d+$/.test(values.seed)) return undefined;
  if (world !== undefined) {
    if (presetName !== undefined || (size !== "small" && size !== "full")) return undefined;
    return worldStorm(world, Number(values.seed ?? 1), size);
  }
  const preset = PRESETS[presetName ?? "demo"];
  if (preset === undefined || values.size !== undefined) return undefined;
  return { ...preset, seed: Number(values.seed ?? preset.seed) };
}

/** Runs the generator from the command line. @returns the exit status */
export async function runStormCommand(args: readonly string[]): Promise<number> {
  try {
    const { values, positionals } = parseArgs({
      args: [...args],
      options: {
        preset: { type: "string" },
        world: { type: "string" },
        seed: { type: "string" },
        size: { type: "string" },
        gates: { type: "boolean" },
        list: { type: "boolean" },
        help: { type: "boolean" },
      },
      allowPositionals: true,
    });
    if (values.help) {
      process.stdout.write(USAGE);
      return 0;
    }
    if (values.list) {
      for (const { name, says } of WORLDS) process.stdout.write(`${name.padEnd(28)}${says}\n`);
      return 0;
    }
    const storm = chosenStorm(values);
    const [folder] = positionals;
    if (folder === undefined || positionals.length !== 1 || storm === undefined) {
      process.stderr.write(USAGE);
      return 2;
    }
    const started = performance.now();
    const done = await generateStorm({ ...storm, folder, gates: values.gates ?? false });
    const seconds = ((performance.now() - started) / 1000).toFixed(1);
    process.stdout.write(
      `${done.radarFiles} radar files, ${done.gaugeCount} gauges, district mean ${done.meanMm.toFixed(1)} mm, ` +
        `wettest ${done.maximumMm.toFixed(1)} mm, in ${seconds} s (all invented)\n`,
    );
    if (storm.world !== undefined) process.stdout.write(`truth ${truthDigest(folder)}\n`);
    return 0;
  } catch (error) {
    process.stderr.write(`error: ${error instanceof Error ? error.message : String(error)}\n`);
    return 1;
  }
}
