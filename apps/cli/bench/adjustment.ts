import { fileURLToPath } from "node:url";
import { trueWorld, worldFolder } from "./ablation/worlds.ts";
import { evaluate, type Measured } from "./adjustment/evaluate.ts";
import { gatherWorld } from "./adjustment/gather.ts";
import { adjustmentOptions } from "./adjustment/options.ts";
import { aimLines, summaryTable, worldTable } from "./adjustment/tables.ts";
import { KeptLines, nullIsNaN } from "./shared/kept-lines.ts";

/**
 * Holds every way to adjust against the truth of invented worlds, and with them the choice that `total` makes: the job
 * runs once per world and seed, and every candidate learns from the gauges that it trusted.
 */
export default async function run(args: readonly string[], generator: string): Promise<void> {
  const { worlds, seeds, cache, results } = adjustmentOptions(args);
  const kept = new KeptLines<Measured>(results, fileURLToPath(import.meta.url), nullIsNaN);
  console.log(
    "Depths of the window, and of its hours, against the truth at the ground, on all cells that the radars observed.\nbias: estimate over truth. of bias: RMSE over that of the mean-field bias on the same radar with the same gauges.\n",
  );
  const done: Measured[] = [];
  for (const world of worlds) {
    for (const seed of seeds) {
      const known = kept.find((one) => one.world === world && one.seed === seed);
      if (known !== undefined) {
        done.push(known);
        continue;
      }
      const folder = worldFolder(generator, cache, world, seed, "small");
      const measured = evaluate(world, seed, await gatherWorld(trueWorld(folder), "by-cross-validation"));
      kept.keep(measured);
      done.push(measured);
    }
    console.log(`${worldTable(done.filter((measured) => measured.world === world))}\n`);
  }
  console.log(`${summaryTable(done)}\n`);
  for (const line of aimLines(done)) console.log(line);
}
