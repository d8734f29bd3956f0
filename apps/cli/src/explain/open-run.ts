import { existsSync, readFileSync } from "node:fs";
import path from "node:path";
import { InputError, type LearnedEcho } from "@rainreckon/core";
import { readLearned, sha256OfFile } from "@rainreckon/formats";
import { type Run, readRun } from "../compare/read-run.ts";
import type { ManifestInput } from "../manifest.ts";
import { type LoadedPlan, loadPlan } from "../plan/load.ts";
import { LEARNED, learnsBeforehand, withLearned } from "../total/learned-run.ts";
import { type PreparedRun, prepareRun } from "../total/prepare.ts";
import { isUnfinished, RUN_LOG } from "../total/run-folder.ts";
import { leftOutLog } from "../ui/left-out.ts";
import { counted } from "../ui/numbers.ts";
import type { Progress } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import { version } from "../version.ts";

/** A finished run, ready to be made again from the very files it was made from. */
export interface OpenedRun {
  readonly done: Run;
  readonly run: PreparedRun;
  /** Its totals.nc. */
  readonly totalsFile: string;
  /** What keeps the account from being of one piece with the run, in sentences. */
  readonly remarks: readonly string[];
}

/**
 * Opens the folder of a run, finds its plan, and makes sure that plan, inputs and what was learned are those of the
 * manifest.
 *
 * @param planPath - where the plan lies; undefined takes it from where the run found it
 * @throws InputError (kind "usage") where the folder holds no finished run, or anything differs from its manifest
 */
export async function openRun(
  folder: string,
  planPath: string | undefined,
  terminal: Terminal,
  progressOf: (total: number, noun: string) => Progress,
): Promise<OpenedRun> {
  if (isUnfinished(folder))
    throw usage(
      "the run in this folder is not finished",
      folder,
      "run total again: it goes on where it stopped",
    );
  const done = readRun(folder);
  const { manifest } = done;
  const found = await loadPlan(planPath ?? planOf(folder));
  if (found.digest !== manifest.planDigest) {
    throw usage(
      "this plan is not the one that the run was made with",
      found.path,
      "name the plan as it was with --plan, or run total again",
    );
  }
  const learnedFile = manifest.outputs.some(({ file }) => file === LEARNED)
    ? await checkedOutput(folder, done, LEARNED)
    : undefined;
  const totalsFile = await checkedOutput(folder, done, "totals.nc");
  await checkInputs(found, manifest.inputs, progressOf);
  const loaded = onlyKnown(found, manifest.inputs);
  // What has to be said of the inputs was said by total, and stands in the manifest.
  const silent = leftOutLog({ ...terminal, note: () => undefined });
  for (const notice of loaded.notices) silent.add("file not found", notice);
  const planned = await prepareRun(loaded, silent, progressOf);
  const remarks: string[] = [];
  if (manifest.version !== version())
    remarks.push(`the run was made by rainreckon ${manifest.version}, this account by ${version()}`);
  const run =
    learnedFile === undefined || !learnsBeforehand(planned)
      ? planned
      : withLearned(planned, await learnedOf(learnedFile));
  return { done, run, totalsFile, remarks };
}

/** The plan as the run's log has it, from the run's folder on. @throws InputError (kind "usage") where it is not there */
export function planOf(folder: string): string {
  const fix = "name the plan with --plan";
  const file = path.join(folder, RUN_LOG);
  let plan: unknown;
  try {
    plan = (JSON.parse(readFileSync(file, "utf8")) as { plan?: unknown } | null)?.plan;
  } catch (cause) {
    throw new InputError("nothing tells where the plan of this run lies", file, fix, {
      kind: "usage",
      cause,
    });
  }
  if (typeof plan !== "string") throw usage("nothing tells where the plan of this run lies", file, fix);
  const resolved = path.resolve(folder, plan);
  if (!existsSync(resolved)) throw usage("the plan is no longer where the run found it", resolved, fix);
  return resolved;
}

/** Every input must be there with the SHA-256 that the manifest has. */
export async function checkInputs(
  { folder }: LoadedPlan,
  inputs: readonly ManifestInput[],
  progressOf: (total: number, noun: string) => Progress,
): Promise<void> {
  const missing: string[] = [];
  const changed: string[] = [];
  const progress = progressOf(inputs.length, "files checked");
  for (const { path: name, sha256 } of inputs) {
    const file = path.resolve(folder, name);
    if (!existsSync(file)) missing.push(name);
    else if ((await sha256OfFile(file)) !== sha256) changed.push(name);
    progress.advance();
  }
  progress.end();
  const fault = [...missing, ...changed][0];
  if (fault === undefined) return;
  const others = missing.length + changed.length - 1;
  const what = missing.length > 0 ? "a file of this run is missing" : "a file of this run was changed since";
  throw usage(
    `${what}${others > 0 ? `, and ${counted(others, "other")} like it` : ""}: its SHA-256 must be that of manifest.json`,
    path.join(folder, fault),
    "put the file back as it was, name the plan beside the right files with --plan, or run total again",
  );
}

/** The plan with the files that the run knew: what came since has no part in its figures. */
function onlyKnown(loaded: LoadedPlan, inputs: readonly ManifestInput[]): LoadedPlan {
  const names = new Set(inputs.map((input) => input.path));
  const isKnown = (file: string) => names.has(path.relative(loaded.folder, file).split(path.sep).join("/"));
  return {
    ...loaded,
    scanFiles: loaded.scanFiles.filter(isKnown),
    gridFiles: loaded.gridFiles.map((grids) => ({ ...grids, files: grids.files.filter(isKnown) })),
    gaugeFiles: loaded.gaugeFiles.map((gauges) => ({ ...gauges, files: gauges.files.filter(isKnown) })),
  };
}

/** What the run learned of its radars, by site. */
async function learnedOf(file: string): Promise<ReadonlyMap<string, LearnedEcho>> {
  return new Map(Object.entries((await readLearned(file)) as unknown as Record<string, LearnedEcho>));
}

/** The path of an output whose SHA-256 is that of the manifest. @throws InputError (kind "usage") where it is not */
export async function checkedOutput(folder: string, { manifest }: Run, name: string): Promise<string> {
  const file = path.join(folder, name);
  const known = manifest.outputs.find((output) => output.file === name);
  const fix = "put it back as it was, or run total again with --force";
  if (known === undefined || !existsSync(file)) throw usage(`the run has no ${name} any more`, file, fix);
  if ((await sha256OfFile(file)) !== known.sha256)
    throw usage(`${name} was changed since: its SHA-256 is not that of manifest.json`, file, fix);
  return file;
}

function usage(what: string, where: string, fix: string): InputError {
  return new InputError(what, where, fix, { kind: "usage" });
}
