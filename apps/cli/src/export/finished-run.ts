import { readFileSync } from "node:fs";
import { InputError } from "@rainreckon/core";
import { ownCsvRows } from "../compare/own-csv.ts";
import { type Run, readRun } from "../compare/read-run.ts";
import { checkedOutput } from "../explain/open-run.ts";
import { type Plan, planSchema } from "../plan/schema.ts";
import { isUnfinished } from "../total/run-folder.ts";

/** A finished run, as its files tell of it: nothing is made again. */
export interface FinishedRun {
  readonly folder: string;
  readonly done: Run;
  readonly plan: Plan;
}

/** @throws InputError (kind "usage") where the folder holds no finished run of this version */
export function finishedRun(folder: string): FinishedRun {
  if (isUnfinished(folder))
    throw new InputError(
      "the run in this folder is not finished",
      folder,
      "run total again: it goes on where it stopped",
      { kind: "usage" },
    );
  const done = readRun(folder);
  const plan = planSchema.safeParse(done.manifest.plan);
  if (plan.success) return { folder, done, plan: plan.data };
  throw new InputError(
    `the plan in its manifest is not one of this version (${plan.error.issues[0]?.path.join(".") ?? ""})`,
    folder,
    "run total again with --force",
    { kind: "usage" },
  );
}

/**
 * Rows of a table of the run, by column name.
 *
 * @throws InputError (kind "usage") where the run has no such table, or it was changed since
 */
export async function tableOf(run: FinishedRun, name: string): Promise<readonly Record<string, string>[]> {
  return ownCsvRows(readFileSync(await checkedOutput(run.folder, run.done, name), "utf8"));
}

/** A number of a table of ours; an empty cell is NaN: not observed. */
export function numberOf(cell: string | undefined): number {
  return cell === undefined || cell === "" ? Number.NaN : Number(cell);
}
