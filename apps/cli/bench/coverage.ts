import { fileURLToPath } from "node:url";
import { trueWorld, worldFolder } from "./ablation/worlds.ts";
import { gatherWorld } from "./adjustment/gather.ts";
import { type Covered, measureCoverage } from "./intervals/measure.ts";
import { coverageOptions } from "./intervals/options.ts";
import { aimLines, classTable, worldTable } from "./intervals/tables.ts";
import { KeptLines } from "./shared/kept-lines.ts";

/**
 * Holds p10 to p90 against the truth of invented worlds: the `total` job runs once per world and seed, and its error
 * model speaks of cells without a gauge, of gauges that were held out, and of areas.
 */
export default async function run(args: readonly string[], generator: string): Promise<void> {
  const { worlds, seeds, method, cache, results } = coverageOptions(args);
  const kept = new KeptLines<Covered>(results, fileURLToPath(import.meta.url));
  console.log(
    `Share of truths of 2 mm and more between p10 and p90 of the window (aim 75 to 85 %), and how wide that is beside gauges alone.\nAdjusted by ${method}.\n`,
  );
  const done: Covered[] = [];
  for (const world of worlds) {
    for (const seed of seeds) {
      let covered = kept.find((one) => one.world === world && one.seed === seed && one.method === method);
      if (covered === undefined) {
        const truth = trueWorld(worldFolder(generator, cache, world, seed, "small"));
        covered = { world, seed, method, ...measureCoverage(truth, await gatherWorld(truth, method)) };
        kept.keep(covered);
      }
      done.push(covered);
    }
  }
  console.log(`${worldTable(done)}\n\n${classTable(done)}\n`);
  for (const line of aimLines(done)) console.log(line);
}
