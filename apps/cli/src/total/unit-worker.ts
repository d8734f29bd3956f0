import { workerData } from "piscina";
import type { RunShape, UnitJob } from "./job.ts";
import { runUnit } from "./run-unit.ts";
import { unitStore } from "./unit-store.ts";

/** What a worker is started with. */
export interface WorkerShare {
  readonly shape: RunShape;
  readonly folder: string;
}

const share = workerData as WorkerShare;
const store = unitStore(share.folder);

/** Works on one unit and leaves its result on disk; only the numbers that the run counts travel back. */
export default async function work(job: UnitJob): Promise<void> {
  store.save(job, await runUnit(share.shape, job));
}
