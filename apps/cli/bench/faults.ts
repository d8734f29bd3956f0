import { fileURLToPath } from "node:url";
import { worldFolder } from "./ablation/worlds.ts";
import { gatherFaults } from "./faults/gather.ts";
import { faultOptions } from "./faults/options.ts";
import { aimLines, causeTable, faultTable, goodTable, missLines } from "./faults/tables.ts";
import { type Judged, judgeWorld } from "./faults/tally.ts";
import { KeptLines } from "./shared/kept-lines.ts";

/** What became of a world's gauges. */
interface Line {
  readonly world: string;
  readonly seed: number;
  readonly judged: readonly Judged[];
}

/** Holds the verdicts on gauges against what was planted in invented worlds. */
export default async function run(args: readonly string[], generator: string): Promise<void> {
  const { worlds, seeds, cache, evidence, results } = faultOptions(args);
  const kept = new KeptLines<Line>(results, fileURLToPath(import.meta.url));
  const judged: Judged[] = [];
  for (const world of worlds) {
    for (const seed of seeds) {
      const line = kept.find((one) => one.world === world && one.seed === seed);
      if (line !== undefined) {
        judged.push(...line.judged);
        continue;
      }
      const makeWorld = () => worldFolder(generator, cache, world, seed, "small");
      const fresh = judgeWorld(await gatherFaults(makeWorld, world, seed, evidence));
      judged.push(...fresh);
      kept.keep({ world, seed, judged: fresh });
    }
  }
  for (const table of [faultTable(judged), goodTable(judged), causeTable(judged)]) console.log(`${table}\n`);
  for (const line of [...missLines(judged), "", ...aimLines(judged)]) console.log(line);
}
