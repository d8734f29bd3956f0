import { existsSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { Piscina } from "piscina";
import type { Progress } from "../ui/progress.ts";
import type { PreparedRun } from "./prepare.ts";
import { runUnit } from "./run-unit.ts";
import { type UnitStore, unitStore } from "./unit-store.ts";
import type { WorkerShare } from "./unit-worker.ts";
import { errorOf, type WorkerFault } from "./worker-fault.ts";

/**
 * Works on all units that are not on disk yet, here or in worker threads.
 *
 * @returns the store of their results, and how many were there already
 */
export async function workUnits(
  run: PreparedRun,
  folder: string,
  workers: number,
  progress: Progress,
): Promise<{ readonly store: UnitStore; readonly resumed: number }> {
  const store = unitStore(folder);
  const missing = run.jobs.filter((job) => !store.has(job));
  const resumed = run.jobs.length - missing.length;
  progress.advance(resumed);
  if (workers <= 1 || missing.length <= 1) {
    for (const job of missing) {
      store.save(job, await runUnit(run.shape, job));
      progress.advance();
    }
    return { store, resumed };
  }
  const share: WorkerShare = { shape: run.shape, folder };
  const pool = new Piscina({
    filename: workerFile(),
    minThreads: Math.min(workers, missing.length),
    maxThreads: Math.min(workers, missing.length),
    workerData: share,
  });
  try {
    await Promise.all(
      missing.map(async (job) => {
        const fault = (await pool.run(job)) as WorkerFault | undefined;
        if (fault !== undefined) throw errorOf(fault);
        progress.advance();
      }),
    );
  } finally {
    await pool.destroy();
  }
  return { store, resumed };
}

/** The worker's built file lies beside the program's. */
function workerFile(): string {
  const file = fileURLToPath(new URL("./unit-worker.js", import.meta.url));
  if (!existsSync(file)) throw new Error(`the worker's file is missing: ${file}`);
  return file;
}
