import { fork } from "node:child_process";
import { writeFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { type Measured, measure, type Place, type Task } from "./ablation/measure.ts";
import { ablationOptions } from "./ablation/options.ts";
import { aimLines, idleLines, tollTable, worldTable } from "./ablation/tables.ts";
import { variantsFor } from "./ablation/variants.ts";

/** Measures the chain from echo to rain against the truth of invented worlds, step by step. */
export default async function run(args: readonly string[], generator: string): Promise<void> {
  const { worlds, seeds, size, steps, cache, workers, json } = ablationOptions(args);
  const tasks = worlds.flatMap((world) =>
    seeds.map((seed): Task => ({ world, seed, size, variants: variantsFor(world, steps) })),
  );
  const place: Place = { generator, cache };
  console.log(
    "Depths of the window against the truth at the ground. bias: estimate over truth. *: cells free of clutter.\n",
  );
  const done: Measured[] = [];
  const measured = (run: Measured) => {
    done.push(run);
    const same = done.filter(({ world }) => world === run.world);
    if (same.length === seeds.length) {
      console.log(`${worldTable(same.toSorted((a, b) => a.seed - b.seed))}\n`);
    }
  };
  if (workers > 1) await inWorkers(tasks, place, workers, measured);
  else for (const task of tasks) measured(await measure(task, place));
  console.log(`${tollTable(done)}\n`);
  for (const line of [...aimLines(done), ...idleLines(done)]) console.log(line);
  if (json !== undefined) writeFileSync(json, `${JSON.stringify(done)}\n`);
}

/** Deals tasks to processes of this same file. */
async function inWorkers(
  tasks: readonly Task[],
  place: Place,
  workers: number,
  measured: (run: Measured) => void,
): Promise<void> {
  const waiting = [...tasks];
  const one = () =>
    new Promise<void>((resolve, reject) => {
      const child = fork(fileURLToPath(import.meta.url), { serialization: "advanced" });
      const next = () => {
        const task = waiting.shift();
        if (task === undefined) child.disconnect();
        else child.send({ task, place });
      };
      child.on("message", (run: Measured) => {
        measured(run);
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
