import { createHash } from "node:crypto";
import { existsSync, readFileSync, renameSync, writeFileSync } from "node:fs";
import path from "node:path";
import { deserialize, serialize } from "node:v8";
import { deflateSync, inflateSync } from "node:zlib";
import type { UnitJob, UnitResult } from "./job.ts";

/**
 * Results of units on disk, so that an interrupted run goes on where it stopped.
 *
 * A file is a SHA-256 of its content and the content; one that does not match is as good as none. It is
 * written beside its name and renamed, so a file under its own name is whole.
 */
export interface UnitStore {
  has(job: UnitJob): boolean;
  save(job: UnitJob, result: UnitResult): void;
  /** @throws Error where the file changed since `has` */
  load(job: UnitJob): UnitResult;
}

const HASH_BYTES = 32;

export function unitStore(folder: string): UnitStore {
  const fileOf = (job: UnitJob) => path.join(folder, `unit-${String(job.number).padStart(5, "0")}`);
  const content = (file: string): Buffer | undefined => {
    if (!existsSync(file)) return undefined;
    const bytes = readFileSync(file);
    const body = bytes.subarray(HASH_BYTES);
    return createHash("sha256").update(body).digest().equals(bytes.subarray(0, HASH_BYTES))
      ? body
      : undefined;
  };
  return {
    has: (job) => content(fileOf(job)) !== undefined,
    save(job, result) {
      // Level 1: rain fields are mostly zero, and this is scratch space.
      const body = deflateSync(serialize(result), { level: 1 });
      const file = fileOf(job);
      const beside = `${file}.part`;
      try {
        writeFileSync(beside, Buffer.concat([createHash("sha256").update(body).digest(), body]));
        renameSync(beside, file);
      } catch (error) {
        // A write that fails (a full disk) does not say where; people must be told which disk it was.
        if (error instanceof Error && !("path" in error)) Object.assign(error, { path: beside });
        throw error;
      }
    },
    load(job) {
      const body = content(fileOf(job));
      if (body === undefined) throw new Error(`result of unit ${job.number} is gone or damaged`);
      return deserialize(inflateSync(body)) as UnitResult;
    },
  };
}
