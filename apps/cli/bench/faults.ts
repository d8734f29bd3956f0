import { createHash } from "node:crypto";
import { appendFileSync, existsSync, readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { worldFolder } from "./ablation/worlds.ts";
import { gatherFaults } from "./faults/gather.ts";
import { faultOptions } from "./faults/options.ts";
import { aimLines, causeTable, faultTable, goodTable, missLines } from "./faults/tables.ts";
import { type Judged, judgeWorld } from "./faults/tally.ts";

/** What this state of the code made of a world. */
interface Line {
  /** SHA-256 of the bundled program: what another state of the code measured is void. */
  readonly program: string;
  readonly world: string;
  readonly seed: number;
  readonly judged: readonly Judged[];
}

/** Holds the verdicts on gauges against what was planted in invented worlds. */
export default async function run(args: readonly string[], generator: string): Promise<void> {
  const { worlds, seeds, cache, evidence, results } = faultOptions(args);
  const program = createHash("sha256")
    .update(readFileSync(fileURLToPath(import.meta.url)))
    .digest("hex");
  const known = results !== undefined && existsSync(results) ? readLines(results) : [];
  const judged: Judged[] = [];
  for (const world of worlds) {
    for (const seed of seeds) {
      const line = known.find((one) => one.program === program && one.world === world && one.seed === seed);
      if (line !== undefined) {
        judged.push(...line.judged);
        continue;
      }
      const makeWorld = () => worldFolder(generator, cache, world, seed, "small");
      const fresh = judgeWorld(await gatherFaults(makeWorld, world, seed, evidence));
      judged.push(...fresh);
      if (results !== undefined) {
        appendFileSync(results, `${JSON.stringify({ program, world, seed, judged: fresh })}\n`);
      }
    }
  }
  for (const table of [faultTable(judged), goodTable(judged), causeTable(judged)]) console.log(`${table}\n`);
  for (const line of [...missLines(judged), "", ...aimLines(judged)]) console.log(line);
}

function readLines(file: string): Line[] {
  return readFileSync(file, "utf8")
    .split("\n")
    .filter((text) => text !== "")
    .map((text) => JSON.parse(text) as Line);
}
