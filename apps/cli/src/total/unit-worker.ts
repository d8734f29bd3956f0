import { workerData } from "piscina";
import type { RunShape, UnitJob } from "./job.ts";
import { runUnit } from "./run-unit.ts";
import { unitStore } from "./unit-store.ts";
import { faultOf, type WorkerFault } from "./worker-fault.ts";

/** What a worker is started with. */
export interface WorkerShare {
  readonly shape: RunShape;
  readonly folder: string;
}

const share = workerData as WorkerShare;
const store = unitStore(share.folder);

/** Works on one unit and leaves its result on disk. @returns what went wrong, if anything did */
export default async function work(job: UnitJob): Promise<WorkerFault | undefined> {
  try {
    store.save(job, await runUnit(share.shape, job));
    return undefined;
  } catch (error) {
    return faultOf(error);
  }
}
