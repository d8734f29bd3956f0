import { fork } from "node:child_process";
import { fileURLToPath } from "node:url";
import { type Measured, measure, type Place, type Task } from "./ablation/measure.ts";
import { ablationOptions } from "./ablation/options.ts";
import { ResultsFile } from "./ablation/results.ts";
import {
  aimLines,
  calibrationLines,
  idleLines,
  stepTable,
  summaryTable,
  tollTable,
  worldTable,
} from "./ablation/tables.ts";
import { variantsFor } from "./ablation/variants.ts";

/** Measures the chain from echo to rain against the truth of invented worlds, step by step. */
export default async function run(args: readonly string[], generator: string): Promise<void> {
  const { worlds, seeds, size, steps, moments, cache, workers, results } = ablationOptions(args);
  const tasks = worlds.flatMap((world) =>
    seeds.map((seed): Task => ({ world, seed, size, variants: variantsFor(world, steps), moments })),
  );
  const place: Place = { generator, cache };
  const kept = new ResultsFile(results, fileURLToPath(import.meta.url));
  console.log(
    "Depths of the window against the truth at the ground. bias: estimate over truth. *: cells free of clutter.\n",
  );
  const done: Measured[] = [];
  const tell = (measured: Measured) => {
    done.push(measured);
    const same = done.filter(({ world }) => world === measured.world);
    if (same.length === seeds.length) {
      console.log(`${worldTable(same.toSorted((a, b) => a.seed - b.seed))}\n`);
    }
  };
  const open = tasks.filter((task) => {
    const known = kept.known(task);
    if (known !== undefined) tell(known);
    return known === undefined;
  });
  const finished = (task: Task, measured: Measured) => {
    kept.keep(task, measured);
    tell(measured);
  };
  if (workers > 1) await inWorkers(open, place, workers, finished);
  else for (const task of open) finished(task, await measure(task, place));
  done.sort((a, b) => worlds.indexOf(a.world) - worlds.indexOf(b.world) || a.seed - b.seed);
  for (const table of [summaryTable(done), steps ? stepTable(done) : "", tollTable(done)]) {
    if (table !== "") console.log(`${table}\n`);
  }
  for (const line of [...aimLines(done), ...idleLines(done), ...calibrationLines(done)]) console.log(line);
}

/** Deals tasks to processes of this same file. */
async function inWorkers(
  tasks: readonly Task[],
  place: Place,
  workers: number,
  finished: (task: Task, measured: Measured) => void,
): Promise<void> {
  const waiting = [...tasks];
  const one = () =>
    new Promise<void>((resolve, reject) => {
      const child = fork(fileURLToPath(import.meta.url), { serialization: "advanced" });
      let task: Task | undefined;
      const next = () => {
        task = waiting.shift();
        if (task === undefined) child.disconnect();
        else child.send({ task, place });
      };
      child.on("message", (measured: Measured) => {
        if (task !== undefined) finished(task, measured);
        next();
      });
      child.on("error", reject);
      child.on("exit", (status) =>
        status === 0 ? resolve() : reject(new Error(`a worker ended with ${status}`)),
      );
      next();
    });
  await Promise.all(Array.from({ length: Math.min(workers, tasks.length) }, one));
}

// Forked by the above: one task after the other, until the parent has no more.
if (process.send !== undefined && process.argv[1] === fileURLToPath(import.meta.url)) {
  process.on("message", ({ task, place }: { task: Task; place: Place }) => {
    measure(task, place).then(
      (run) => process.send!(run),
      (error: unknown) => {
        console.error(error);
        process.exit(1);
      },
    );
  });
}
