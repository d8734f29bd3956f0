import { existsSync, mkdtempSync, readFileSync, rmSync, statSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { durationMs } from "@rainreckon/accumulation";
import { InputError, midEpochMs } from "@rainreckon/core";
import { checkedOutput, planOf } from "../explain/open-run.ts";
import { finishedRun } from "../export/finished-run.ts";
import { type LoadedPlan, loadPlan } from "../plan/load.ts";
import { compareWithGauges } from "../total/against-gauges.ts";
import { assemble } from "../total/assemble.ts";
import { indexScans } from "../total/inputs.ts";
import { learnBeforehand } from "../total/learned-run.ts";
import { prepareRun } from "../total/prepare.ts";
import { workUnits } from "../total/work.ts";
import { type LeftOutLog, leftOutLog } from "../ui/left-out.ts";
import { isoUtc } from "../ui/numbers.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import { CHECKS_FILE, checkDocument } from "./document.ts";
import { type CheckDocument, checkSchema } from "./schema.ts";

export interface CheckOptions {
  /** Only the time before the newest scan; the plan's window where left out. */
  readonly sinceMs?: number;
  readonly workers: number;
}

/**
 * What the checks make of gauges and radars: of a finished run as it stands in its folder, of a plan by making the
 * radar's depths anew, without any output.
 *
 * @param target - a plan, or the folder of a run
 * @throws InputError as `loadPlan` and `prepareRun`; kind "usage" where the target is neither
 */
export async function check(
  target: string,
  options: CheckOptions,
  terminal: Terminal,
): Promise<CheckDocument> {
  const isFolder = statSync(target, { throwIfNoEntry: false })?.isDirectory() === true;
  if (!isFolder) return checkPlan(target, options, terminal);
  if (options.sinceMs === undefined) return checksOf(target);
  finishedRun(target);
  return checkPlan(planOf(target), options, terminal);
}

/** What stands in a run's folder, held against its manifest. */
async function checksOf(folder: string): Promise<CheckDocument> {
  const run = finishedRun(folder);
  const file = await checkedOutput(folder, run.done, CHECKS_FILE);
  return checkSchema.parse(JSON.parse(readFileSync(file, "utf8")));
}

async function checkPlan(
  planPath: string,
  { sinceMs, workers }: CheckOptions,
  terminal: Terminal,
): Promise<CheckDocument> {
  if (!existsSync(planPath))
    throw new InputError(
      "there is neither a plan nor a run here",
      planPath,
      "name a plan, or the folder of a run",
      {
        kind: "usage",
      },
    );
  const log = leftOutLog(terminal);
  const loaded = await loadPlan(planPath);
  for (const notice of loaded.notices) log.add("file not found", notice);
  const narrowed = sinceMs === undefined ? loaded : await lastPart(loaded, sinceMs, terminal);
  const planned = await prepareRun(narrowed, log, (count, noun) => progressBar(terminal, count, noun));
  // The headline under other relations has no part in a check.
  const lean = { ...planned, shape: { ...planned.shape, variants: [], headlineCells: new Int32Array() } };
  const run = await learnBeforehand(lean, log);
  const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-check-"));
  try {
    const progress = progressBar(terminal, run.jobs.length, "units of work");
    const { store } = await workUnits(run, scratch, workers, progress);
    progress.end();
    const total = assemble(run.shape, run.jobs, store, run.window.endEpochMs - run.window.startEpochMs);
    tellNotices(total.notices, log);
    return checkDocument(run, compareWithGauges(run, total));
  } finally {
    rmSync(scratch, { recursive: true, force: true });
    log.finish();
  }
}

function tellNotices(
  notices: readonly { what: string; where: string; fix: string }[],
  log: LeftOutLog,
): void {
  for (const { what, where, fix } of notices) log.add("sweep left out", { what, where, fix });
}

/** A window that no scan lies outside of. */
const EVER = { from: "1970-01-01T00:00:00Z", to: "2200-01-01T00:00:00Z" };

/**
 * The plan for its last part alone: so long before the newest scan, in whole steps; with the scans that reach into it.
 * What is wrong with the others has no part in it, and is not told.
 */
async function lastPart(loaded: LoadedPlan, sinceMs: number, terminal: Terminal): Promise<LoadedPlan> {
  const silent = leftOutLog({ ...terminal, note: () => undefined });
  const everything = { ...loaded, plan: { ...loaded.plan, window: { ...loaded.plan.window, ...EVER } } };
  const progress = progressBar(terminal, loaded.scanFiles.length, "scans");
  const radars = await indexScans(everything, silent, () => undefined, progress);
  progress.end();
  const sweeps = radars.flatMap((radar) => radar.sweeps);
  const newest = sweeps.reduce((latest, { header }) => Math.max(latest, midEpochMs(header)), -Infinity);
  if (!Number.isFinite(newest))
    throw new InputError("no scan tells what time is the newest", loaded.path, "leave --since out", {
      kind: "no-input",
    });
  const stepMs = durationMs(loaded.plan.intervals.series);
  const to = Math.ceil(newest / stepMs) * stepMs;
  const from = Math.floor((to - sinceMs) / stepMs) * stepMs;
  const reachMs = Math.max(...loaded.plan.radars.map(({ maxGapMinutes }) => maxGapMinutes)) * 60_000;
  const near = new Set(
    sweeps.filter(({ header }) => midEpochMs(header) >= from - reachMs).map(({ file }) => file.path),
  );
  return {
    ...loaded,
    plan: { ...loaded.plan, window: { ...loaded.plan.window, from: isoUtc(from), to: isoUtc(to) } },
    scanFiles: loaded.scanFiles.filter((file) => near.has(file)),
  };
}
