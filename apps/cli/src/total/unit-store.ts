import path from "node:path";
import type { UnitJob, UnitResult } from "./job.ts";
import { isSealed, loadSealed, saveSealed } from "./sealed-file.ts";

/** Results of units on disk, so that an interrupted run goes on where it stopped; see `sealed-file.ts`. */
export interface UnitStore {
  has(job: UnitJob): boolean;
  save(job: UnitJob, result: UnitResult): void;
  /** @throws Error where the file changed since `has` */
  load(job: UnitJob): UnitResult;
}

export function unitStore(folder: string): UnitStore {
  const fileOf = (job: UnitJob) => path.join(folder, `unit-${String(job.number).padStart(5, "0")}`);
  return {
    has: (job) => isSealed(fileOf(job)),
    save: (job, result) => saveSealed(fileOf(job), result),
    load(job) {
      const result = loadSealed(fileOf(job));
      if (result === undefined) throw new Error(`result of unit ${job.number} is gone or damaged`);
      return result as UnitResult;
    },
  };
}
