import { rmSync, writeFileSync } from "node:fs";
import path from "node:path";
import { parse } from "yaml";
import type { ManifestNotice } from "../../src/manifest.ts";
import { composePlan } from "../../src/plan/compose.ts";
import { loadPlan } from "../../src/plan/load.ts";
import { survey } from "../../src/survey/survey.ts";
import { walkFiles } from "../../src/survey/walk.ts";
import { type AssembledRun, assemble } from "../../src/total/assemble.ts";
import type { UnitJob, UnitResult } from "../../src/total/job.ts";
import { learnBeforehand } from "../../src/total/learned-run.ts";
import { type PreparedRun, prepareRun } from "../../src/total/prepare.ts";
import { runUnit } from "../../src/total/run-unit.ts";
import { leftOutLog } from "../../src/ui/left-out.ts";
import { SILENT } from "../ablation/run-variant.ts";
import { merged, type Overlay } from "../ablation/variants.ts";

/** The `total` job of a world as far as its radars go, nothing of it on disk. */
export interface WorldRun {
  readonly run: PreparedRun;
  readonly total: AssembledRun;
  /** Of the units of work, in order of time. */
  readonly units: readonly UnitResult[];
  readonly notices: readonly ManifestNotice[];
}

/** The clock of the network whose stamps name no zone: what its README says, as a user would write it. */
const SALTWATER = { network: "saltwater", zone: "UTC+01:00" };

/**
 * Runs the `total` job on a world, radars and gauges, by a fresh plan.
 *
 * @param folder - the world's
 * @param asked - what the plan says otherwise
 */
export async function runWorld(folder: string, asked: Overlay): Promise<WorldRun> {
  const planFile = path.join(folder, `plan-${process.pid}.yaml`);
  const inputs = ["radar", "gauges", "catchments.geojson", "terrain.tif"].map((name) =>
    path.join(folder, name),
  );
  const result = await survey(inputs, walkFiles(inputs), SILENT);
  const plan = parse(composePlan(result, folder, "bench")) as Overlay;
  const gauges = (plan.gauges as readonly Overlay[]).map((entry) =>
    entry.network === SALTWATER.network ? { ...entry, ...SALTWATER } : entry,
  );
  const changes = { rain: { headlineRelations: [] }, ...asked };
  writeFileSync(planFile, JSON.stringify({ ...merged(plan, changes), gauges }));
  try {
    const log = leftOutLog(SILENT);
    const still = { advance: () => undefined, end: () => undefined };
    const run = await learnBeforehand(await prepareRun(await loadPlan(planFile), log, () => still), log);
    const units = new Map<number, UnitResult>();
    for (const job of run.jobs) units.set(job.number, await runUnit(run.shape, job));
    const store = {
      has: (job: UnitJob) => units.has(job.number),
      save: () => undefined,
      load: (job: UnitJob) => units.get(job.number)!,
    };
    const total = assemble(run.shape, run.jobs, store, run.window.endEpochMs - run.window.startEpochMs);
    return { run, total, units: [...units.values()], notices: log.all };
  } finally {
    rmSync(planFile, { force: true });
  }
}
